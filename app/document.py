"""The open layout with its history, its selection and its file: the screen's one truth.

Every change comes in through `edit`. A drag shows `preview` after `preview` and ends
with one `edit` or with `revert`. Views and panels listen and never refresh by hand.
"""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoCommand, QUndoStack

from engine.edits import changed_ids
from engine.layout import Layout
from engine.vouched import with_true_origins

EVERYTHING = frozenset({"*"})


class Document(QObject):
    """A layout being edited.

    Attributes
    ----------
    layout : Layout
        What is shown now: the preview while one runs, else the committed layout.
    undo_stack : QUndoStack
        One command per edit; its texts are sentences.
    path : Path or None
        The file it was read from or last saved to.

    Signals
    -------
    changed(layout, ids)
        The layout to show and the ids that differ from the one shown before.
        `EVERYTHING` when another layout was opened.
    settled(layout)
        A committed layout is shown; no drag is going on.
    selection_changed(ids)
        The selected ids as a frozenset.
    path_changed(path)
    """

    changed = Signal(object, object)
    settled = Signal(object)
    selection_changed = Signal(object)
    path_changed = Signal(object)

    def __init__(self, layout: Layout | None = None, path: Path | None = None) -> None:
        super().__init__()
        self._committed = layout or Layout()
        self._shown = self._committed
        self._selection: frozenset[str] = frozenset()
        self.path = path
        self.undo_stack = QUndoStack(self)
        #: The layout last handed in, and what was made of it.
        self._given = self._taken = self._committed

    @property
    def layout(self) -> Layout:
        return self._shown

    @property
    def committed(self) -> Layout:
        """The layout without any preview."""
        return self._committed

    @property
    def is_previewing(self) -> bool:
        return self._shown is not self._committed

    @property
    def is_modified(self) -> bool:
        return not self.undo_stack.isClean()

    @property
    def selection(self) -> frozenset[str]:
        return self._selection

    def select(self, ids: Iterable[str]) -> None:
        """Make `ids` the selection, leaving out what the layout does not hold."""
        known = self._shown.by_id()
        selection = frozenset(i for i in ids if i in known)
        if selection != self._selection:
            self._selection = selection
            self.selection_changed.emit(selection)

    def edit(self, text: str, layout: Layout) -> None:
        """Commit `layout` as one undo step named by the sentence `text`.

        Values that changed lose the origin that stood for them as they were.
        """
        layout = self._with_true_origins(layout)
        if layout == self._committed:
            self.revert()
            return
        self.undo_stack.push(_Edit(self, text, self._committed, layout))

    def preview(self, layout: Layout) -> None:
        """Show `layout` without committing it."""
        self._show(self._with_true_origins(layout))

    def revert(self) -> None:
        """End a preview without a change."""
        if self.is_previewing:
            self._show(self._committed)
            self.settled.emit(self._committed)

    def open(self, layout: Layout, path: Path | None) -> None:
        """Start over with another layout and an empty history."""
        self.undo_stack.clear()
        self._committed = self._shown = self._given = self._taken = layout
        self._selection = frozenset()
        self.set_path(path)
        self.selection_changed.emit(self._selection)
        self.changed.emit(layout, EVERYTHING)
        self.settled.emit(layout)

    def set_path(self, path: Path | None) -> None:
        """Say where the layout is kept."""
        self.path = path
        self.path_changed.emit(path)

    def _with_true_origins(self, layout: Layout) -> Layout:
        """What is previewed and then committed is one value: views need not redraw."""
        if layout is not self._given:
            self._given = layout
            self._taken = with_true_origins(self._committed, layout)
        return self._taken

    def _commit(self, layout: Layout) -> None:
        self._committed = self._given = self._taken = layout
        self._show(layout)
        self.settled.emit(layout)

    def _show(self, layout: Layout) -> None:
        ids = changed_ids(self._shown, layout)
        self._shown = layout
        if ids:
            self.changed.emit(layout, ids)
        self.select(self._selection)


class _Edit(QUndoCommand):
    """One step of the history: the whole layout before and after."""

    def __init__(
        self, document: Document, text: str, before: Layout, after: Layout
    ) -> None:
        super().__init__(text)
        self._document = document
        self._before = before
        self._after = after

    def redo(self) -> None:
        self._document._commit(self._after)

    def undo(self) -> None:
        self._document._commit(self._before)
