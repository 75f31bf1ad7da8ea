"""The mark beside a value that says where it comes from, and the form that sets it.

A letter A marks an assumption; a value with an origin has a small dot. The form opens
beneath the mark and goes with Escape.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

from msgspec.structs import replace
from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QCloseEvent, QKeyEvent
from PySide6.QtWidgets import (
    QApplication,
    QComboBox,
    QFormLayout,
    QFrame,
    QLineEdit,
    QPushButton,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from app.document import Document
from app.panels.field import Choice
from app.panels.panel import Words, plain_tip
from app.theme import BODY, STEP, theme_for
from engine.edits import added, checked, collections, replaced, unused_id
from engine.errors import UserError
from engine.items import Item, SourceDocument, ValueOrigin
from engine.layout import Layout
from engine.origins import assumptions, origin_of, with_origin

Kind = Literal["assumed", "document", "measured", "confirmed"]

KINDS: tuple[tuple[Kind, str], ...] = (
    ("document", "from a document"),
    ("measured", "measured"),
    ("confirmed", "confirmed by a person"),
    ("assumed", "assumed"),
)

#: Lines of the form for each kind, with what they hold.
_LINES: dict[str, tuple[str, ...]] = {
    "document": ("page", "note"),
    "measured": ("date", "instrument", "note"),
    "confirmed": ("by", "date", "note"),
    "assumed": ("note",),
}
_TITLES = {
    "page": "Page or place", "note": "Note", "date": "Date",
    "instrument": "Instrument", "by": "By",
}  # fmt: skip


def field_words(field: str) -> str:
    """A dotted field name as words: "net_current" is "net current"."""
    return field.replace("_", " ").replace(".", ", ")


def origin_text(layout: Layout, origin: ValueOrigin | None) -> str:
    """An origin as a phrase: "from Load list, F1"."""
    if origin is None:
        return "assumed"
    if origin.kind == "document":
        source = layout.by_id().get(origin.document or "")
        name = source.title if source is not None else origin.document or "a document"
        parts = [f"from {name}", origin.page]
    elif origin.kind == "measured":
        with_what = f"with {origin.instrument}" if origin.instrument else ""
        parts = ["measured", origin.date, with_what]
    elif origin.kind == "confirmed":
        parts = [f"confirmed by {origin.by}" if origin.by else "confirmed", origin.date]
    else:
        parts = ["assumed"]
    said = ", ".join(part for part in parts if part)
    return f"{said}: {origin.note}" if origin.note else said


class OriginForm(QFrame):
    """Where values come from; `Set` enters it for all of them as one undo step."""

    def __init__(self, document: Document, targets: Sequence[tuple[str, str]]) -> None:
        """`targets` are ids of items, each with the name of a field."""
        super().__init__()
        self._document, self._targets = document, tuple(targets)
        self._opener: QWidget = self
        self.setFrameShape(QFrame.Shape.StyledPanel)
        self.setAutoFillBackground(True)
        item, field = self._targets[0]
        present = origin_of(document.committed.by_id()[item], field)
        self.kind = Choice(
            KINDS, self._on_kind, name="Origin", tip="Where the value comes from"
        )
        self.source = QComboBox()
        self.source.setEditable(True)
        self.source.setAccessibleName("Document")
        self.source.setToolTip("A document of this layout, or the name of a new one")
        self.source.addItem("", None)
        for held in document.layout.documents:
            self.source.addItem(held.title, held.id)
        self.lines = {name: QLineEdit() for name in _TITLES}
        self.reason = Words(style="warning")
        self.reason.hide()
        self.set_button = QPushButton("Set")
        self.set_button.setDefault(True)
        self.set_button.setToolTip("Enter this origin")
        self.set_button.clicked.connect(self.apply)
        self._form = QFormLayout()
        self._form.setSpacing(STEP)
        self._form.addRow("Origin", self.kind)
        self._form.addRow("Document", self.source)
        for name, title in _TITLES.items():
            self.lines[name].setAccessibleName(title)
            self.lines[name].setToolTip(title)
            self.lines[name].setMaxLength(400)
            self.lines[name].returnPressed.connect(self.apply)
            self._form.addRow(title, self.lines[name])
        box = QVBoxLayout(self)
        box.setContentsMargins(3 * STEP, 3 * STEP, 3 * STEP, 3 * STEP)
        box.addWidget(Words(f"Origin of {self._words()}", "plain"))
        box.addLayout(self._form)
        box.addWidget(self.reason)
        box.addWidget(self.set_button)
        self.setFixedWidth(75 * STEP)
        self._fill(present)

    def open_under(self, widget: QWidget) -> None:
        """Show the form beneath a widget, inside its window; it goes when closed."""
        window = widget.window()
        self.setParent(window)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._opener = widget
        below = widget.mapTo(window, widget.rect().bottomRight())
        self.adjustSize()
        left = min(below.x(), window.width() - STEP) - self.width()
        top = min(below.y(), window.height() - self.height() - STEP)
        self.move(max(left, 0), max(top, 0))
        self.show()
        self.raise_()
        self.kind.setFocus()
        application = QApplication.instance()
        assert isinstance(application, QApplication)
        application.focusChanged.connect(self._on_focus)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.close()
            return
        super().keyPressEvent(event)

    def closeEvent(self, event: QCloseEvent) -> None:
        had_focus = self.isAncestorOf(QApplication.focusWidget() or self._opener)
        super().closeEvent(event)
        if had_focus:
            self._opener.setFocus()

    def _on_focus(self, _old: QWidget | None, new: QWidget | None) -> None:
        """Go when the focus goes elsewhere, but not to a list that drops down."""
        inside = new
        while inside is not None and inside is not self:
            inside = inside.parentWidget()
        if new is not None and inside is None:
            self.close()

    def apply(self) -> None:
        """Enter the origin, or say what is missing."""
        try:
            layout = self._stated()
        except UserError as error:
            self.reason.setText(str(error))
            self.reason.show()
            self.adjustSize()
            return
        verb = "comes" if len(self._targets) == 1 else "come"
        words = self._words()
        document = self._document
        # Nothing of the form is touched after it has closed: closing deletes it.
        self.close()
        document.edit(f"State where {words} {verb} from", layout)

    def _words(self) -> str:
        item, field = self._targets[0]
        if len(self._targets) > 1:
            return f"{len(self._targets)} values"
        return f"{field_words(field)} of {self._document.committed.by_id()[item].title}"

    def _fill(self, present: ValueOrigin | None) -> None:
        kind: Kind = "document" if present is None else present.kind
        self.kind.set_value(kind)
        if present is not None:
            for name, line in self.lines.items():
                line.setText(getattr(present, name))
            self.source.setCurrentIndex(max(self.source.findData(present.document), 0))
        self._on_kind(kind)

    def _on_kind(self, kind: Kind) -> None:
        self._form.setRowVisible(self.source, kind == "document")
        for name, line in self.lines.items():
            self._form.setRowVisible(line, name in _LINES[kind])
        self.adjustSize()

    def _stated(self) -> Layout:
        layout = self._document.committed
        kind: Kind = self.kind.value
        texts = {name: self.lines[name].text().strip() for name in _LINES[kind]}
        if kind == "measured" and not texts["date"]:
            raise UserError("State the date of the measurement.")
        if kind == "confirmed" and not texts["by"]:
            raise UserError("State who confirms the value.")
        source = None
        if kind == "document":
            layout, source = self._with_document(layout)
        changed: dict[str, Item] = {}
        present = layout.by_id()
        for item, field in self._targets:
            if item not in present:
                raise UserError("The value is gone since: press Esc to leave.")
            origin = ValueOrigin(field=field, kind=kind, document=source, **texts)
            before = changed.get(item, present[item])
            changed[item] = checked(with_origin(before, origin))
        return replaced(layout, *changed.values())

    def _with_document(self, layout: Layout) -> tuple[Layout, str]:
        """The document named in the form; one that is not there yet is added."""
        name = self.source.currentText().strip()
        if not name:
            raise UserError("Choose the document, or type the name of a new one.")
        for held in layout.documents:
            if name in (held.title, held.id):
                return layout, held.id
        new = checked(SourceDocument(id=unused_id(layout, name), name=name))
        return added(layout, new), new.id


class OriginMark(QToolButton):
    """Says whether a value is an assumption; a press opens its `OriginForm`."""

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self._item = self._field = ""
        self._is_assumed = False
        self.form: OriginForm | None = None
        self.setFixedSize(6 * STEP, 6 * STEP)
        self.setAutoRaise(True)
        self.setAccessibleName("Origin of the value")
        self.setToolTip("Where the value comes from")
        self.clicked.connect(self.open_form)

    @property
    def is_assumed(self) -> bool:
        return self._is_assumed

    def show_value(self, item: Item, field: str, assumed: bool) -> None:
        """Stand for the value `field` of `item`."""
        self._item, self._field, self._is_assumed = item.id, field, assumed
        stated = origin_of(item, field)
        words = field_words(field)
        if assumed:
            text = "A"
            said = f"{origin_text(self._document.layout, stated)}; nothing backs it yet"
        elif stated is not None:
            text, said = "•", origin_text(self._document.layout, stated)
        else:
            text, said = "", "nothing is entered that needs an origin"
        self.setText(text)
        self.setEnabled(bool(text))
        self.setAccessibleName(f"Origin of {words}: {said}")
        press = " Press to state its origin." if text else ""
        self.setToolTip(plain_tip(f"{words.capitalize()}: {said}.{press}"))
        self._colour()

    def open_form(self) -> None:
        """Open the form beneath the mark."""
        if self._item not in self._document.committed.by_id():
            return
        self.form = OriginForm(self._document, [(self._item, self._field)])
        self.form.destroyed.connect(self._on_form_gone)
        self.form.open_under(self)

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange:
            self._colour()
        super().changeEvent(event)

    def _colour(self) -> None:
        theme = theme_for(self.palette())
        colour = theme.warning if self._is_assumed else theme.muted
        wanted = f"color: {colour}; font-size: {BODY}px; border: none;"
        wanted = (
            f"QToolButton {{{wanted}}} "
            f"QToolButton:focus {{border: 1px solid {theme.accent};}}"
        )
        if wanted != self.styleSheet():
            self.setStyleSheet(wanted)

    def _on_form_gone(self) -> None:
        self.form = None


def assumed_fields(item: Item) -> frozenset[str]:
    """Fields of one item that are assumptions."""
    place = collections()[type(item)]
    held = item if place in ("title", "settings") else (item,)
    alone = assumptions(replace(Layout(), **{place: held}))
    return frozenset(a.field for a in alone if a.item == item.id)
