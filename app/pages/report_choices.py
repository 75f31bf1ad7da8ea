"""What is asked of the report: which document, of which variant, on which paper."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QCheckBox, QFormLayout, QLabel, QVBoxLayout, QWidget

from app.document import Document
from app.panels.field import Choice
from app.panels.panel import Words
from app.theme import STEP
from engine.layout import Layout

if TYPE_CHECKING:
    from engine.report.choices import Choices

_KINDS = (("report", "Report"), ("note", "Note, one to two pages"))
_PAPERS = ("A4", "A3", "Letter", "Tabloid")
_ORIENTATIONS = (
    (None, "Usual for the paper"),
    ("portrait", "Portrait"),
    ("landscape", "Landscape"),
)


class ReportChoices(QWidget):
    """The options; nothing here is an edit of the layout.

    Signals
    -------
    changed()
        Another report is asked for.
    keep_changed(on)
    """

    changed = Signal()
    keep_changed = Signal(bool)

    def __init__(self, document: Document) -> None:
        super().__init__()
        self._document = document
        self.kind = self._choice(_KINDS, "Document", "The full report, or a short note")
        self.variant = self._choice(
            ((None, "Base"),), "Of", "The base or a variant; the report names it"
        )
        self.paper = self._choice(
            ((None, "As the layout says"),), "Paper", "Size of the pages"
        )
        self.orientation = self._choice(
            _ORIENTATIONS,
            "Text pages",
            "How they lie; pages with drawings lie as these want it",
        )
        self.checks = QCheckBox("Run the outside checks")
        self.checks.setToolTip(
            "Published values beside the program's, run now and printed in the report; "
            "a note has none"
        )
        self.checks.setChecked(True)
        self.checks.clicked.connect(lambda _on: self.changed.emit())
        self.keep = QCheckBox("Keep the pages up to date")
        self.keep.setToolTip(
            "Make the pages again after every edit; else by “Make again” only"
        )
        self.keep.setChecked(True)
        self.keep.clicked.connect(self.keep_changed)
        for box, value in (
            (self.kind, "report"),
            (self.variant, None),
            (self.orientation, None),
        ):
            box.set_value(value)
        rows = QFormLayout()
        rows.setHorizontalSpacing(2 * STEP)
        rows.setVerticalSpacing(STEP)
        rows.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.AllNonFixedFieldsGrow)
        for words, widget in (
            ("Document", self.kind),
            ("Of", self.variant),
            ("Paper", self.paper),
            ("Text pages", self.orientation),
        ):
            label = QLabel(words)
            label.setBuddy(widget)
            rows.addRow(label, widget)
        self.dated = Words()
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(2 * STEP)
        column.addLayout(rows)
        for one in (self.checks, self.keep, self.dated):
            column.addWidget(one)

    @property
    def choices(self) -> Choices:
        """As the engine takes them."""
        from engine.report.choices import Choices

        return Choices(
            kind=self.kind.value,
            variant=self.variant.value,
            paper=self.paper.value,
            orientation=self.orientation.value,
            validate=self.checks.isChecked() or self.kind.value == "note",
        )

    def refresh(self) -> None:
        """Offer what the layout has; a variant that is gone gives way to the base."""
        whole: Layout = self._document.whole
        self._offer_variants(self.variant.value)
        paper = self.paper.value
        own = (None, f"{whole.settings.paper}, as the layout says")
        self.paper.set_options([own, *((name, name) for name in _PAPERS)])
        self.paper.set_value(paper)
        self.checks.setEnabled(self.kind.value == "report")
        date = whole.title.date
        self.dated.setText(
            f"Dated {date}" if date else "Not dated yet: enter a date under Title."
        )

    def choose_variant(self, variant: str | None) -> None:
        """Ask for the report of a variant, or of the base."""
        self._offer_variants(variant)

    def _offer_variants(self, chosen: str | None) -> None:
        known = [(v.id, v.title) for v in self._document.whole.variants]
        self.variant.set_options([(None, "Base"), *known])
        self.variant.set_value(chosen if chosen in dict(known) else None)
        self.variant.setEnabled(bool(known))

    def _choice(self, options: Any, name: str, tip: str) -> Choice:
        return Choice(options, self._on_chosen, name=name, tip=tip)

    def _on_chosen(self, _value: object) -> None:
        self.checks.setEnabled(self.kind.value == "report")
        self.changed.emit()
