"""Which of several items over each other a click takes: the next one each time.

The first click at a place takes the uppermost; further ones there go down, and after
the lowest begin again at the top.
"""

from __future__ import annotations

from math import dist

from app.tools.tool import Point, Pointer


class Stack:
    """What clicks at one place have taken so far."""

    def __init__(self) -> None:
        self._at: Point = (0.0, 0.0)
        self._plane = ""
        self._taken: list[str] = []
        self._went_down = False
        self._was_chosen = False

    @property
    def taken(self) -> str | None:
        """Id of what was taken last."""
        return self._taken[-1] if self._taken else None

    def is_again(self, pointer: Pointer, selection: frozenset[str]) -> bool:
        """Whether a pointer is where the last click was, its item still chosen."""
        return (
            selection == {self.taken}
            and pointer.plane == self._plane
            and dist(pointer.raw, self._at) <= pointer.reach
        )

    def begin(self, pointer: Pointer, item: str, *, was_chosen: bool) -> None:
        """A click at a new place took `item`, which may have been chosen before."""
        self._at, self._plane = pointer.raw, pointer.plane
        self._taken, self._went_down = [item], False
        self._was_chosen = was_chosen

    def stay(self) -> None:
        """A further click took nothing else."""
        self._went_down = False

    def forget(self) -> None:
        """Clicks begin anew."""
        self._taken, self._went_down = [], False

    def further(self, pointer: Pointer) -> str:
        """Take the next item beneath; the same where there is no other."""
        here = pointer.under
        last = self._taken[-1]
        fresh = [item for item in here if item not in self._taken]
        if not fresh:
            self._taken = []
            fresh = [item for item in here if item != last] or [last]
        self._went_down = True
        self._taken.append(fresh[0])
        return fresh[0]

    def goes_on(self, pointer: Pointer) -> bool:
        """Whether a quick second click is one more click on what lies here.

        Only what was chosen before both of them is meant by a double click.
        """
        if len(pointer.under) < 2 or self.taken not in pointer.under:
            return False
        return self._went_down or not self._was_chosen

    def words(self, pointer: Pointer) -> str:
        """Which one of how many was taken; empty for a single one."""
        here = pointer.under
        if len(here) < 2 or self.taken not in here:
            return ""
        return f"{min(len(self._taken), len(here))} of {len(here)} here"
