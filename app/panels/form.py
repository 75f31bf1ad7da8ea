"""A form: the values of items in rows, with heading, mark of origin and reason.

Entering a value is one undo step through the document. What the items cannot have
turns the field, says why, and changes nothing.
"""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QGridLayout, QLabel, QVBoxLayout, QWidget

from app.document import Document
from app.panels.editors import Editor, editor_for, is_wide
from app.panels.kinds import Kind, Terms, si_unit
from app.panels.origin import OriginMark
from app.panels.panel import Words, decimal_sign
from app.panels.parts import Group, Part
from app.panels.slot_forms import SlotItem
from app.theme import STEP, scaled
from engine.errors import UserError
from engine.items import Item
from engine.layout import Layout
from engine.runs import Run
from engine.sections import slots

#: Width of the labels before the fields. [logical pixels]
_LABEL = min(scaled(26 * STEP), 30 * STEP)


class Form(QWidget):
    """Rows of fields for groups of items; rebuilt only when its make changes."""

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self._groups: tuple[Group, ...] = ()
        self._rows: list[Row] = []
        self._notes: list[Words] = []
        self._waiting: tuple[Group, ...] | None = None
        self._is_showing = False
        self._column = QVBoxLayout(self)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(STEP)

    def show_groups(self, groups: tuple[Group, ...]) -> None:
        """Show groups of values; fields whose make is the same stay."""
        # A field that goes may enter what was typed in it, which comes back here.
        self._waiting = groups
        if self._is_showing:
            return
        self._is_showing = True
        try:
            while (newest := self._waiting) is not None:
                self._waiting = None
                self._show_groups(newest)
        finally:
            self._is_showing = False

    def _show_groups(self, groups: tuple[Group, ...]) -> None:
        is_new = _make(groups) != _make(self._groups)
        self._groups = groups
        if is_new:
            self._build()
        terms = Terms(self._document.layout, decimal_sign())
        shown = ((group, part) for group in groups for part in group.parts)
        for row, (group, part) in zip(self._rows, shown, strict=True):
            row.show_part(part, group.items, terms)
        for words, group in zip(self._notes, groups, strict=True):
            words.setText(group.note)
            words.setVisible(bool(group.note))

    def editor(self, path: str) -> Any:
        """The editor of a value. Raises KeyError when it is not shown."""
        return self.row(path).editor

    def row(self, path: str) -> Row:
        """The row of a value. Raises KeyError when it is not shown."""
        for row in self._rows:
            if row.part.path == path:
                return row
        raise KeyError(path)

    def paths(self) -> list[str]:
        """Dotted names of the values shown, from above."""
        return [row.part.path for row in self._rows]

    def _build(self) -> None:
        while (held := self._column.takeAt(0)) is not None:
            widget = held.widget()
            if widget is not None:
                widget.hide()
                widget.deleteLater()
        self._rows, self._notes = [], []
        for index, group in enumerate(self._groups):
            if group.heading:
                heading = Words(group.heading, "plain")
                heading.setContentsMargins(0, 3 * STEP if index else 0, 0, 0)
                font = heading.font()
                font.setBold(True)
                heading.setFont(font)
                self._column.addWidget(heading)
            self._notes.append(Words())
            self._column.addWidget(self._notes[-1])
            for part in group.parts:
                row = Row(self._document, part)
                self._rows.append(row)
                self._column.addWidget(row)
        self._column.addStretch(1)


class Row(QWidget):
    """One value: label, editor, mark of its origin, note."""

    def __init__(self, document: Document, part: Part) -> None:
        super().__init__()
        self._document = document
        self._items: tuple[Item, ...] = ()
        self.part = part
        self.editor: Editor = editor_for(part.kind, self._enter, part.label, part.tip)
        self.mark = OriginMark(document)
        self._note = Words()
        label = QLabel(part.label)
        label.setTextFormat(Qt.TextFormat.PlainText)
        label.setWordWrap(True)
        label.setToolTip(part.tip)
        label.setBuddy(self.editor)
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(STEP)
        grid.setVerticalSpacing(STEP // 2)
        grid.setColumnStretch(1, 1)
        grid.setColumnMinimumWidth(2, 6 * STEP)
        top = Qt.AlignmentFlag.AlignTop
        if is_wide(part.kind):
            grid.addWidget(label, 0, 0, 1, 2)
            grid.addWidget(self.mark, 0, 2, top)
            grid.addWidget(self.editor, 1, 0, 1, 3)
            grid.addWidget(self._note, 2, 0, 1, 3)
        else:
            label.setFixedWidth(_LABEL)
            label.setContentsMargins(0, STEP, 0, 0)
            grid.addWidget(label, 0, 0, top)
            grid.addWidget(self.editor, 0, 1, top)
            grid.addWidget(self.mark, 0, 2, top)
            grid.addWidget(self._note, 1, 1, 1, 2)

    def show_part(self, part: Part, items: tuple[Item, ...], terms: Terms) -> None:
        """Show the value of the items, and whether it is an assumption."""
        self.part, self._items = part, items
        values = [part.value(terms.layout, item) for item in items]
        self.editor.show_values(values, part.kind, terms)
        self._note.setText(part.note)
        self._note.setVisible(bool(part.note))
        is_assumed = part.is_assumed(items)
        self.mark.setVisible(is_assumed or part.has_origin(items))
        self.mark.show_value(items[0], part.path, is_assumed)
        if len(items) > 1:
            self.mark.setEnabled(False)
            self.mark.setToolTip(
                "An assumption in one of the items or more; select one to state where "
                "its value comes from."
            )
        else:
            self.mark.setEnabled(True)

    def _enter(self, value: Any) -> None:
        """One undo step. Raises `UserError` when an item cannot have the value.

        A field that goes because its items went or became others enters nothing.
        """
        if not _are_held(self._document.committed, self._items):
            return
        terms = Terms(self._document.layout, decimal_sign())
        try:
            layout = self.part.entered(self._document.committed, self._items, value)
        except UserError as error:
            reason = _without_opening(str(error), self._items)
            raise UserError(_with_unit(reason, self.part.kind)) from None
        self._document.edit(self.part.sentence(self._items, value, terms), layout)


def _are_held(layout: Layout, items: tuple[Item, ...]) -> bool:
    """Whether the layout holds the very items, or conductors of its sections."""
    by_id = layout.by_id()
    for item in items:
        if isinstance(item, SlotItem):
            run = by_id.get(item.run)
            if not isinstance(run, Run) or item.slot not in slots(run.section):
                return False
        elif by_id.get(item.id) != item:
            return False
    return True


def _with_unit(reason: str, kind: Kind) -> str:
    """The reason with the unit that its numbers are in: values are SI inside."""
    unit = si_unit(kind)
    if not unit or ", got " not in reason:
        return reason
    return f"{reason.removesuffix('.')} (in {unit})."


def _make(groups: tuple[Group, ...]) -> list[object]:
    """What a form must be rebuilt for."""
    return [
        (g.heading, [(p.path, p.label, p.tip, _make_of(p)) for p in g.parts])
        for g in groups
    ]


def _make_of(part: Part) -> object:
    kind = part.kind
    headings = [c.heading for c in kind.columns] if hasattr(kind, "columns") else ()
    return type(kind), headings


def _without_opening(sentence: str, items: tuple[Item, ...]) -> str:
    """The reason alone: beside the field it is clear what was entered where."""
    for item in items:
        opening = f"{item.id} cannot be entered: "
        if sentence.startswith(opening):
            rest = sentence.removeprefix(opening)
            _, _, reason = rest.rpartition(": ")
            reason = reason.replace(" or null", " or nothing")
            return reason[:1].upper() + reason[1:]
    return sentence
