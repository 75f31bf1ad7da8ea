"""Everything the user is told in passing goes through here; the window shows it.

Also the one place that catches what nobody expected: it logs, keeps the program
alive and tells the user.
"""

from __future__ import annotations

import sys
import traceback
from collections.abc import Iterator
from contextlib import contextmanager
from types import TracebackType

from PySide6.QtCore import QObject, Signal

from engine.errors import UserError


class Messages(QObject):
    """Where sentences for the user come together.

    Signals
    -------
    told(kind, sentence)
        `kind` is "information", "refusal", "warning" or "error".
    failed(summary, details)
        Something nobody expected; `details` is the traceback.
    """

    told = Signal(str, str)
    failed = Signal(str, str)

    def inform(self, sentence: str) -> None:
        self.told.emit("information", sentence)

    def refuse(self, sentence: str) -> None:
        """Say why something does not happen; it goes when the work goes on."""
        self.told.emit("refusal", sentence)

    def warn(self, sentence: str) -> None:
        self.told.emit("warning", sentence)

    def error(self, sentence: str) -> None:
        self.told.emit("error", sentence)

    @contextmanager
    def shown(self) -> Iterator[None]:
        """Turn a `UserError` raised inside into an error message."""
        try:
            yield
        except UserError as error:
            self.error(str(error))

    def catch_unexpected(self) -> None:
        """Route exceptions that nobody caught to `failed` from now on."""
        sys.excepthook = self._on_unexpected

    def _on_unexpected(
        self,
        kind: type[BaseException],
        error: BaseException,
        trace: TracebackType | None,
    ) -> None:
        if issubclass(kind, KeyboardInterrupt):
            sys.__excepthook__(kind, error, trace)
            return
        details = "".join(traceback.format_exception(kind, error, trace))
        sys.stderr.write(details)
        self.failed.emit(f"{kind.__name__}: {error}", details)
