"""One thread that does the newest of what is asked; what is older is left undone."""

from __future__ import annotations

from collections.abc import Callable
from threading import Condition, Thread
from typing import Generic, TypeVar

Task = TypeVar("Task")

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
    """

    def __init__(
        self,
        name: str,
        work: Callable[[Task, Outdated], None],
        prepare: Callable[[], None] | None = None,
    ) -> None:
        self._work = work
        self._prepare = prepare
        self._condition = Condition()
        self._next: list[Task] = []
        self._is_busy = True
        self._is_closed = False
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
        while True:
            with self._condition:
                self._is_busy = False
                while not self._next and not self._is_closed:
                    self._condition.wait()
                if self._is_closed:
                    return
                task = self._next.pop()
                self._is_busy = True
            self._work(task, self._outdated)
