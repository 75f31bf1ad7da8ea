"""The list of variants: choose, add, copy, rename, remove; and what each changes."""

from __future__ import annotations

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import (
    QListWidget,
    QListWidgetItem,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.messages import Messages
from app.panels.panel import Words, button, plain_tip
from app.theme import STEP
from app.variant_acts import (
    changes_of,
    count_text,
    drop,
    duplicate,
    keep,
    move_to_base,
    new_variant,
    remove,
    rename,
)
from app.wrapping import WrappingRow
from engine.variant import Variant
from engine.variant_remarks import remarks_on

_ID = int(Qt.ItemDataRole.UserRole)
_ENTRY = QSize(0, 6 * STEP)


class VariantList(QWidget):
    """Base and variants; the one in front is shown and edited."""

    chosen = Signal()

    def __init__(self, document: Document, messages: Messages) -> None:
        super().__init__()
        self._document, self._messages = document, messages
        self.list = _List("Base and variants; the chosen one is shown and edited")
        self.list.itemChanged.connect(self._on_renamed)
        self.list.currentItemChanged.connect(self._on_chosen)
        self.changes = _List("What the chosen variant changes")
        self.changes.currentItemChanged.connect(lambda *_: self._enable())
        self._stale: frozenset[str] = frozenset()
        self.remarked = Words("", "warning")
        self.told = Words("")
        acts = QWidget()
        row = WrappingRow(acts, STEP, 0)
        self.new = button("New", "An empty variant over the base", self._new)
        self.copy = button("Duplicate", "Another one with the same changes", self._copy)
        self.name = button("Rename", "Type another name in the list", self._rename)
        self.gone = button("Remove", "The base stays as it is", self._remove)
        for widget in (self.new, self.copy, self.name, self.gone):
            row.addWidget(widget)
        of_change = QWidget()
        below = WrappingRow(of_change, STEP, 0)
        self.move_one = button(
            "Move to base", "Make this change in the base", self._move_one
        )
        self.move_all = button(
            "Move all",
            "Make everything the variant changes in the base",
            self._move_all,
        )
        self.drop = button(
            "Drop", "Leave this item as it is in the base", self._drop_one
        )
        self.keep = button(
            "Keep", "The change stands although the base has changed under it",
            self._keep_one,
        )  # fmt: skip
        for widget in (self.move_one, self.move_all, self.drop, self.keep):
            below.addWidget(widget)
        box = QVBoxLayout(self)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(STEP)
        for part in (
            self.list,
            acts,
            self.told,
            self.changes,
            of_change,
            self.remarked,
        ):
            box.addWidget(part)
        box.setStretch(0, 3)
        box.setStretch(3, 2)
        self.setFocusProxy(self.list)
        document.whole_changed.connect(self.fill)
        self.fill()

    def fill(self) -> None:
        """Show what the document holds."""
        document = self._document
        chosen = None if document.variant is None else document.variant.id
        self.list.blockSignals(True)
        self.list.clear()
        self._entry("Base", None, "what all variants start from")
        for variant in document.whole.variants:
            self._entry(variant.title, variant.id, count_text(variant))
        for k in range(self.list.count()):
            if self.list.item(k).data(_ID) == chosen:
                self.list.setCurrentRow(k)
        self.list.blockSignals(False)
        self._fill_changes(document.variant)

    def _entry(self, title: str, variant: str | None, told: str) -> None:
        entry = QListWidgetItem(title)
        entry.setData(_ID, variant)
        entry.setSizeHint(_ENTRY)
        entry.setToolTip(plain_tip(f"{title}: {told}"))
        if variant is not None:
            entry.setFlags(entry.flags() | Qt.ItemFlag.ItemIsEditable)
        self.list.addItem(entry)

    def _fill_changes(self, variant: Variant | None) -> None:
        whole = self._document.whole
        before = self.changes.currentItem()
        kept = None if before is None else before.data(_ID)
        self.changes.clear()
        has = variant is not None
        for part in (self.changes, self.move_one, self.move_all, self.drop, self.keep):
            part.setVisible(has)
        if variant is None:
            self.told.setText(
                "The base is shown; edits go into it and into all variants."
            )
            self.remarked.hide()
            self._enable()
            return
        self.told.setText(f"“{variant.title}” {count_text(variant)}:")
        for item_id, text in changes_of(whole, variant):
            entry = QListWidgetItem(text)
            entry.setData(_ID, item_id)
            entry.setSizeHint(_ENTRY)
            entry.setToolTip(plain_tip(text))
            self.changes.addItem(entry)
            if item_id == kept:
                self.changes.setCurrentItem(entry)
        if self.changes.currentRow() < 0 and self.changes.count():
            self.changes.setCurrentRow(0)
        found = remarks_on(whole, variant)
        self._stale = frozenset(r.items[1] for r in found if r.code == "W34")
        self.remarked.setText("\n".join(r.sentence for r in found))
        self.remarked.setVisible(bool(found))
        self._enable()

    def _enable(self) -> None:
        variant, change = self._document.variant, self._change
        for act in (self.copy, self.name, self.gone):
            act.setEnabled(variant is not None)
        self.move_all.setEnabled(self.changes.count() > 0)
        for act in (self.move_one, self.drop):
            act.setEnabled(change is not None)
        self.keep.setVisible(change is not None and change in self._stale)

    @property
    def _change(self) -> str | None:
        entry = self.changes.currentItem()
        return None if entry is None else str(entry.data(_ID))

    # -- acting -------------------------------------------------------------------

    def _on_chosen(self, entry: QListWidgetItem | None, _before: object) -> None:
        if entry is not None:
            self._document.choose(entry.data(_ID))
            self.chosen.emit()

    def _on_renamed(self, entry: QListWidgetItem) -> None:
        with self._messages.shown():
            rename(self._document, entry.data(_ID), entry.text())
        self.fill()

    def _new(self) -> None:
        with self._messages.shown():
            new_variant(self._document)
            self._rename()

    def _copy(self) -> None:
        variant = self._document.variant
        if variant is not None:
            with self._messages.shown():
                duplicate(self._document, variant.id)

    def _rename(self) -> None:
        entry = self.list.currentItem()
        if entry is not None and entry.data(_ID) is not None:
            self.list.editItem(entry)

    def _remove(self) -> None:
        variant = self._document.variant
        if variant is not None:
            remove(self._document, variant.id)

    def _move_one(self) -> None:
        self._of_change(
            lambda variant, item: move_to_base(self._document, variant, [item])
        )

    def _move_all(self) -> None:
        self._of_change(lambda variant, _item: move_to_base(self._document, variant))

    def _drop_one(self) -> None:
        self._of_change(lambda variant, item: drop(self._document, variant, item))

    def _keep_one(self) -> None:
        self._of_change(lambda variant, item: keep(self._document, variant, item))

    def _of_change(self, act: object) -> None:
        assert callable(act)
        variant, change = self._document.variant, self._change
        if variant is not None and change is not None:
            with self._messages.shown():
                act(variant.id, change)


class _List(QListWidget):
    """A list that leaves Escape to the page and Tab to the next widget."""

    def __init__(self, name: str) -> None:
        super().__init__()
        self.setAccessibleName(name)
        self.setToolTip(name)
        self.setTabKeyNavigation(False)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setTextElideMode(Qt.TextElideMode.ElideRight)
        self.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Expanding)
        self.setMinimumHeight(12 * STEP)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            event.ignore()
        else:
            super().keyPressEvent(event)
