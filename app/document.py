"""The open layout with its history, its selection and its file: the screen's one truth.

Every change comes in through `edit`. A drag shows `preview` after `preview` and ends
with one `edit` or with `revert`. Views and panels listen and never refresh by hand.

The truth is `whole`: the base with its variants, as files hold it. What views and
panels read is the layout that is shown: the base, or one variant applied to it. What
is edited while a variant is chosen becomes part of the variant.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QUndoCommand, QUndoStack

from engine.edits import changed_ids
from engine.layout import Layout
from engine.variant import Variant
from engine.variants import edited_in_variant, layout_of, variant_called
from engine.vouched import with_true_origins

EVERYTHING = frozenset({"*"})


@dataclass(frozen=True, eq=False)
class _State:
    """The base with its variants, the id of the one shown, and what it comes to."""

    whole: Layout
    variant: str | None
    shown: Layout


def _state(whole: Layout, variant: str | None) -> _State:
    """A state; the base is shown where the variant is gone."""
    if variant not in {v.id for v in whole.variants}:
        variant = None
    shown = whole if variant is None else layout_of(whole, variant)
    return _State(whole, variant, shown)


class Document(QObject):
    """A layout being edited.

    Attributes
    ----------
    layout : Layout
        What is shown now: the preview while one runs, else the committed layout.
    whole : Layout
        The base with its variants: what is kept in files.
    variant : Variant or None
        The one that is shown and edited; None: the base.
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
    whole_changed()
        The base, a variant or the choice of a variant is another one.
    selection_changed(ids)
        The selected ids as a frozenset.
    path_changed(path)
    """

    changed = Signal(object, object)
    settled = Signal(object)
    whole_changed = Signal()
    selection_changed = Signal(object)
    path_changed = Signal(object)

    def __init__(self, layout: Layout | None = None, path: Path | None = None) -> None:
        super().__init__()
        self._state = _state(layout or Layout(), None)
        self._shown = self._state.shown
        self._selection: frozenset[str] = frozenset()
        self.path = path
        self.undo_stack = QUndoStack(self)
        # A history that goes would tell of it to parts that are gone.
        self.destroyed.connect(partial(self.undo_stack.blockSignals, True))
        #: The layout last handed in, and what was made of it.
        self._given, self._taken = self._state.shown, self._state

    @property
    def layout(self) -> Layout:
        return self._shown

    @property
    def committed(self) -> Layout:
        """What is shown, without any preview: base or variant."""
        return self._state.shown

    @property
    def whole(self) -> Layout:
        return self._state.whole

    @property
    def variant(self) -> Variant | None:
        chosen = self._state.variant
        return None if chosen is None else variant_called(self.whole, chosen)

    @property
    def is_previewing(self) -> bool:
        return self._shown is not self._state.shown

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

    def choose(self, variant: str | None) -> None:
        """Show and edit a variant by its id; None: the base. Not a step of undo."""
        self.revert()
        if variant != self._state.variant:
            self._commit(_state(self.whole, variant))

    def edit(self, text: str, layout: Layout) -> None:
        """Commit `layout` as one undo step named by the sentence `text`.

        While a variant is chosen, the step goes into it. Values that changed lose the
        origin that stood for them as they were.

        Raises
        ------
        UserError
            When a new item has the id of a variant.
        """
        after = self._with_true_origins(layout)
        if after.whole == self.whole:
            self.revert()
            return
        if self.variant is not None:
            text = f"{text} · in {self.variant.title}"
        self.undo_stack.push(_Edit(self, text, self._state, after))

    def edit_whole(self, text: str, whole: Layout, variant: str | None) -> None:
        """Commit the base with its variants as one undo step, and show `variant`."""
        self.revert()
        after = _state(whole, variant)
        if after.whole == self.whole:
            self.choose(variant)
            return
        self.undo_stack.push(_Edit(self, text, self._state, after))

    def preview(self, layout: Layout) -> None:
        """Show `layout` without committing it."""
        self._show(self._with_true_origins(layout).shown)

    def revert(self) -> None:
        """End a preview without a change."""
        if self.is_previewing:
            self._show(self.committed)
            self.settled.emit(self.committed)

    def open(self, layout: Layout, path: Path | None) -> None:
        """Start over with another layout and an empty history."""
        self.undo_stack.clear()
        self._state = self._taken = _state(layout, None)
        self._shown = self._given = layout
        self._selection = frozenset()
        self.set_path(path)
        self.selection_changed.emit(self._selection)
        self.changed.emit(layout, EVERYTHING)
        self.settled.emit(layout)
        self.whole_changed.emit()

    def set_path(self, path: Path | None) -> None:
        """Say where the layout is kept."""
        self.path = path
        self.path_changed.emit(path)

    def _with_true_origins(self, layout: Layout) -> _State:
        """What is previewed and then committed is one value: views need not redraw."""
        if layout is not self._given:
            true = with_true_origins(self.committed, layout)
            chosen = self._state.variant
            if chosen is not None:
                true = edited_in_variant(self.whole, chosen, true)
            self._given, self._taken = layout, _state(true, chosen)
        return self._taken

    def _commit(self, state: _State) -> None:
        self._state = self._taken = state
        self._given = state.shown
        self._show(state.shown)
        self.settled.emit(state.shown)
        self.whole_changed.emit()

    def _show(self, layout: Layout) -> None:
        ids = changed_ids(self._shown, layout)
        self._shown = layout
        if ids:
            self.changed.emit(layout, ids)
        self.select(self._selection)


class _Edit(QUndoCommand):
    """One step of the history: everything before and after, and what was shown."""

    def __init__(
        self, document: Document, text: str, before: _State, after: _State
    ) -> None:
        super().__init__(text)
        self._document = document
        self._before = before
        self._after = after

    def redo(self) -> None:
        self._document._commit(self._after)

    def undo(self) -> None:
        self._document._commit(self._before)
