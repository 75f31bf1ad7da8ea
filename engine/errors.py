"""Errors that speak to the user, and the one that says a computation was cancelled."""

from __future__ import annotations

from collections.abc import Callable

#: Told how far a long computation is (0 to 1) and what it is doing.
Progress = Callable[[float, str], None]

#: Asked now and then by a long computation whether it should stop.
Cancelled = Callable[[], bool]


class UserError(Exception):
    """Something the user can mend: a whole sentence saying what, where, what to do."""


class ComputationCancelled(Exception):
    """The computation was told to stop; there is no result."""


def stop_if(cancelled: Cancelled | None) -> None:
    """Raise `ComputationCancelled` when the caller asked for it."""
    if cancelled is not None and cancelled():
        raise ComputationCancelled
