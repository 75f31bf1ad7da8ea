"""What a command writes besides its result: progress, and errors as sentences."""

from __future__ import annotations

import sys
import time

from engine.errors import Progress

#: A computation shorter than this shows no progress. [s]
PATIENCE = 2.0


def progress_line() -> Progress:
    """A progress callback that writes to the terminal once patience is over.

    Nothing is written where standard error is no terminal.
    """
    if not sys.stderr.isatty():
        return lambda _share, _doing: None
    started = time.monotonic()

    def show(share: float, doing: str) -> None:
        if time.monotonic() - started < PATIENCE:
            return
        end = "\n" if share >= 1.0 else ""
        sys.stderr.write(f"\r\x1b[K{share:4.0%} {doing}{end}")
        sys.stderr.flush()

    return show


def complain(sentence: str) -> None:
    """Tell the user what went wrong."""
    sys.stderr.write(sentence + "\n")
