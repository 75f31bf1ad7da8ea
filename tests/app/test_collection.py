"""Garbage is collected on the window's thread only."""

from __future__ import annotations

import gc
import threading
import weakref

import pytest
from PySide6.QtCore import QObject

from app.collection import Collection


class _Node(QObject):
    """Holds itself, so that only a collection ends it."""

    def __init__(self) -> None:
        super().__init__()
        self.itself = self


@pytest.fixture
def collection(qapp):
    was_enabled = gc.isenabled()
    yield Collection()
    if was_enabled:
        gc.enable()


def churn() -> None:
    """Leave what only a collection ends: one would start here by itself."""
    for _ in range(2_000):
        ring: list[object] = []
        ring.append(ring)


def test_no_worker_collects(collection):
    gone = weakref.ref(_Node())
    threads = [threading.Thread(target=churn) for _ in range(3)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert gone() is not None
    churn()
    for _ in range(3):
        collection.collect_due()
        churn()
    assert gone() is None


def test_the_clock_collects(collection, qtbot):
    gone = weakref.ref(_Node())

    def is_gone() -> bool:
        churn()
        return gone() is None

    qtbot.waitUntil(is_gone, timeout=5000)
