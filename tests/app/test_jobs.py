"""Long work: off the main thread, told, cancellable, and its faults are sentences."""

from __future__ import annotations

import threading
import time

import pytest

from app.jobs import Jobs
from engine.errors import UserError, stop_if


@pytest.fixture
def jobs(qapp):
    value = Jobs()
    yield value
    value.wait()


def test_the_result_comes_back_on_the_main_thread(jobs, qtbot):
    got = []
    with qtbot.waitSignal(jobs.ended):
        jobs.start(
            "Count",
            lambda cancelled, progress: threading.current_thread(),
            lambda worker: got.append((worker, threading.current_thread())),
        )
    qtbot.waitUntil(lambda: bool(got))
    ((worker, receiver),) = got
    assert worker is not receiver
    assert receiver is threading.main_thread()


def test_progress_is_told(jobs, qtbot):
    told = []
    jobs.progressed.connect(lambda share, doing: told.append((share, doing)))
    with qtbot.waitSignal(jobs.ended):
        jobs.start(
            "Count", lambda cancelled, progress: progress(0.5, "half"), lambda _: None
        )
    assert told == [(0.5, "half")]


def test_a_cancelled_job_gives_nothing(jobs, qtbot):
    got = []

    def work(cancelled, progress):
        while True:
            stop_if(cancelled)
            time.sleep(0.001)

    jobs.start("Wait", work, got.append)
    with qtbot.waitSignal(jobs.ended):
        jobs.cancel()
    assert got == []
    assert not jobs.is_running


def test_a_users_error_is_told_as_its_sentence(jobs, qtbot):
    def work(cancelled, progress):
        raise UserError("The folder is full.")

    with qtbot.waitSignal(jobs.refused) as told:
        jobs.start("Write", work, lambda _: None)
    assert told.args == ["The folder is full."]


def test_a_second_job_waits_its_turn(jobs, qtbot):
    release = threading.Event()
    jobs.start("First", lambda cancelled, progress: release.wait(5), lambda _: None)
    with qtbot.waitSignal(jobs.refused) as told:
        jobs.start("Second", lambda cancelled, progress: None, lambda _: None)
    assert "First is still running" in told.args[0]
    with qtbot.waitSignal(jobs.ended):
        release.set()
