"""The thread that does the newest of what is asked, and leaves time to the pointer."""

from __future__ import annotations

import sys
import time
from itertools import pairwise
from threading import Event

from app.worker import Outdated, Worker


def test_of_what_waits_only_the_newest_is_done() -> None:
    done: list[int] = []
    begun, go_on, last = Event(), Event(), Event()

    def work(task: int, outdated: Outdated) -> None:
        begun.set()
        go_on.wait(10.0)
        done.append(task)
        if task == 3:
            last.set()

    worker = Worker("test", work)
    worker.ask(0)
    assert begun.wait(10.0)
    for task in (1, 2, 3):
        worker.ask(task)
    go_on.set()
    assert last.wait(10.0)
    worker.close()
    assert done == [0, 3]


def test_a_share_leaves_the_rest_of_the_time_to_others() -> None:
    spans: list[tuple[float, float]] = []
    third = Event()

    def work(task: int, outdated: Outdated) -> None:
        began = time.monotonic()
        time.sleep(0.02)
        spans.append((began, time.monotonic()))
        if len(spans) == 3:
            third.set()
        worker.ask(task + 1)

    worker = Worker("test", work, share=0.25)
    worker.ask(0)
    assert third.wait(10.0)
    worker.close()
    for (began, ended), (again, _) in pairwise(spans):
        assert again - ended >= 2.9 * (ended - began)


def test_what_is_asked_of_an_idle_thread_is_done_at_once() -> None:
    began: list[float] = []

    def work(task: int, outdated: Outdated) -> None:
        began.append(time.monotonic())
        time.sleep(0.05)

    worker = Worker("test", work, share=0.01)
    worker.ask(0)
    end = time.monotonic() + 10.0
    while (not began or not worker.is_idle) and time.monotonic() < end:
        time.sleep(0.001)
    asked = time.monotonic()
    worker.ask(1)
    while len(began) < 2 and time.monotonic() < end:
        time.sleep(0.001)
    worker.close()
    assert began[1] - asked < 0.08


def test_the_window_s_own_thread_waits_no_more_than_a_millisecond_for_its_turn() -> (
    None
):
    worker = Worker("test", lambda task, outdated: None)
    worker.close()
    assert sys.getswitchinterval() <= 1e-3
