"""One thread that does the newest of what is asked; what is older is left undone."""

from __future__ import annotations

import sys
import time
from collections.abc import Callable
from threading import Condition, Thread
from typing import Generic, TypeVar

Task = TypeVar("Task")

#: [s]
_LONGEST_REST = 0.1

#: A thread that computes lets the window's own go on after so long. [s]
_TURN = 0.0005

#: Whether something newer has been asked, or the end has come.
Outdated = Callable[[], bool]


class Worker(Generic[Task]):
    """Does tasks one after the other; of those that wait, only the newest.

    Parameters
    ----------
    name : str
        Of the thread.
    work : callable
        Gets the task, and a callable that says whether a newer one waits.
    prepare : callable or None
        Done in the thread before the first task.
    share : float
        While tasks keep coming, at most this part of the time is spent on them; the
        rest is the pointer's. Python does only one thing at a time.
    """

    def __init__(
        self,
        name: str,
        work: Callable[[Task, Outdated], None],
        prepare: Callable[[], None] | None = None,
        *,
        share: float = 1.0,
    ) -> None:
        self._work = work
        self._prepare = prepare
        self._rest_of = 1.0 / share - 1.0
        self._condition = Condition()
        self._next: list[Task] = []
        self._is_busy = True
        self._is_closed = False
        sys.setswitchinterval(_TURN)
        self._thread = Thread(target=self._run, name=name, daemon=True)
        self._thread.start()

    @property
    def is_idle(self) -> bool:
        """Nothing is being done and nothing waits."""
        with self._condition:
            return not self._is_busy and not self._next

    def ask(self, task: Task) -> None:
        """Do this next, instead of anything that still waits."""
        with self._condition:
            self._next = [task]
            self._condition.notify()

    def close(self) -> None:
        """End the thread; what it does is told to stop."""
        with self._condition:
            self._is_closed = True
            self._next = []
            self._condition.notify()
        self._thread.join(10.0)

    def _outdated(self) -> bool:
        return self._is_closed or bool(self._next)

    def _run(self) -> None:
        if self._prepare is not None:
            self._prepare()
        took = 0.0
        while True:
            with self._condition:
                self._is_busy = False
                if self._next:
                    self._rest(min(self._rest_of * took, _LONGEST_REST))
                while not self._next and not self._is_closed:
                    self._condition.wait()
                if self._is_closed:
                    return
                task = self._next.pop()
                self._is_busy = True
            began = time.monotonic()
            self._work(task, self._outdated)
            took = time.monotonic() - began

    def _rest(self, seconds: float) -> None:
        """Leave what comes for a while; the end does not wait for it."""
        end = time.monotonic() + seconds
        while not self._is_closed and (left := end - time.monotonic()) > 0:
            self._condition.wait(left)
