"""The values of one reference level: ranges of a power law or a table, and the plot."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QEvent
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QSizePolicy, QWidget

from app.document import Document
from app.panels import level_values as values_of
from app.panels.field import Choice
from app.panels.level_plot import LevelPlot
from app.panels.level_values import PointRow, RangeRow, Row
from app.panels.origin import OriginMark
from app.panels.panel import Words, column, decimal_sign
from app.panels.table import Column, RowsTable
from app.theme import STEP, scaled
from engine.criteria import LevelRanges, LevelTable, ReferenceLevel
from engine.errors import UserError
from engine.layout import Layout
from engine.units import FLUX_DENSITY_UNITS, significant

KINDS: tuple[tuple[type, str], ...] = (
    (LevelRanges, "ranges: c · f⁻ⁿ"),
    (LevelTable, "table over f"),
)


class LevelTableEditor(QWidget):
    """Edits the values of a level; a row counts once nothing in it is missing."""

    def __init__(self, document: Document, enter: Callable[..., None]) -> None:
        """`enter` is called with what changed and `values=...`; may raise."""
        super().__init__()
        self._document, self._enter = document, enter
        self._level: ReferenceLevel | None = None
        self._drafts: dict[str, tuple[Row, ...]] = {}
        self._kinds: dict[str, type] = {}
        self._unit = ""
        self.kind = Choice(
            KINDS, self._on_kind, name="Form of the values",
            tip="Ranges of a power law over frequency, or a table with straight lines "
            "between its rows on logarithmic axes",
        )  # fmt: skip
        self.unit = Choice(
            tuple((unit, unit) for unit in FLUX_DENSITY_UNITS), self._on_unit,
            name="Unit of the values",
            tip="Unit in which the values are entered and plotted; the layout's unless "
            "another is chosen here",
        )  # fmt: skip
        # An ignored width would count as none beside the other choice.
        self.unit.setSizePolicy(QSizePolicy.Policy.Fixed, QSizePolicy.Policy.Fixed)
        self.unit.setFixedWidth(scaled(20 * STEP))
        self.mark = OriginMark(document)
        self.ranges = RowsTable(
            self._range_columns(), name="Ranges", new_row=lambda _rows: RangeRow()
        )
        self.points = RowsTable(
            self._point_columns(), name="Table", new_row=lambda _rows: PointRow()
        )
        for table in (self.ranges, self.points):
            table.entered.connect(self._on_entered)
        self.add_button = QPushButton("Add row")
        self.add_button.setToolTip("Add an empty row; cells can be pasted too")
        self.add_button.clicked.connect(self._on_add)
        self.remove_button = QPushButton("Remove row")
        self.remove_button.setToolTip("Remove the selected rows")
        self.remove_button.clicked.connect(self._on_remove)
        self.note = Words()
        self.plot = LevelPlot()
        head = QHBoxLayout()
        head.setSpacing(STEP)
        head.addWidget(self.kind, 1)
        head.addWidget(self.unit)
        head.addWidget(self.mark)
        foot = QHBoxLayout()
        foot.setSpacing(STEP)
        foot.addWidget(self.add_button)
        foot.addWidget(self.remove_button)
        foot.addStretch(1)
        box = column(self)
        box.addWidget(Words("Values over frequency", "plain"))
        box.addLayout(head)
        box.addWidget(self.ranges)
        box.addWidget(self.points)
        box.addLayout(foot)
        box.addWidget(self.note)
        box.addWidget(self.plot)

    @property
    def table(self) -> RowsTable:
        """The table of the form that is chosen."""
        return self.ranges if self._form() is LevelRanges else self.points

    @property
    def shown_unit(self) -> str:
        """Unit of the values on the screen."""
        return self._unit or self._document.layout.settings.flux_density_unit

    def show_level(self, level: ReferenceLevel, is_assumed: bool) -> None:
        """Show a level's values, then the rows that are not complete yet."""
        self._level = level
        form = self._form()
        drafts = self._drafts.get(level.id, ())
        self.kind.set_value(form)
        self.unit.set_value(self.shown_unit)
        self.mark.show_value(level, "values", is_assumed)
        self.ranges.setVisible(form is LevelRanges)
        self.points.setVisible(form is LevelTable)
        self.table.set_rows((*values_of.rows_of(level.values), *drafts))
        self.table.fit_height(2, 8)
        self.note.setText(self._said(level, len(drafts)))
        self.note.setVisible(bool(self.note.text()))
        self.plot.show_level(level, self.shown_unit, _flowing(self._document.layout))

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "points"):
            self.ranges.colour()
            self.points.colour()
        super().changeEvent(event)

    def _form(self) -> type:
        level = self._level
        if level is None:
            return LevelRanges
        if level.values is not None:
            return type(level.values)
        return self._kinds.get(level.id, LevelRanges)

    def _said(self, level: ReferenceLevel, drafts: int) -> str:
        parts = []
        if drafts:
            parts.append("A row counts once nothing in it is missing.")
        direct = values_of.direct_value(level.values)
        if direct is not None:
            text = significant(direct / FLUX_DENSITY_UNITS[self.shown_unit])
            text = text.replace(".", decimal_sign())
            parts.append(
                f"At 0 Hz, which the plot cannot show: {text} {self.shown_unit}."
            )
        return " ".join(parts)

    def _on_entered(self, rows: tuple[Row, ...], _sentence: str) -> None:
        level = self._level
        assert level is not None
        try:
            values = values_of.values_of(rows, self._form())
        except UserError as error:
            self.table.refuse(str(error))
            return
        self._drafts[level.id] = tuple(row for row in rows if row.value is None)
        is_empty = not values_of.rows_of(values) and level.values is None
        if is_empty or values == level.values:
            self.show_level(level, self.mark.is_assumed)
        else:
            self._enter("values", values=values)

    def _on_add(self) -> None:
        rows = self.table.rows
        new = RangeRow() if self._form() is LevelRanges else PointRow()
        self._on_entered((*rows, new), "")
        self.table.set_current(len(self.table.rows) - 1, 0)
        self.table.view.setFocus()

    def _on_remove(self) -> None:
        chosen = {i.row() for i in self.table.view.selectionModel().selectedIndexes()}
        rows = tuple(r for i, r in enumerate(self.table.rows) if i not in chosen)
        if len(rows) < len(self.table.rows):
            self._on_entered(rows, "")

    def _on_unit(self, unit: str) -> None:
        self._unit = unit
        if self._level is not None:
            self.show_level(self._level, self.mark.is_assumed)

    def _on_kind(self, form: type) -> None:
        """Another form of the same values, never other values."""
        level = self._level
        if level is None or form is self._form():
            return
        self._kinds[level.id] = form
        self._drafts.pop(level.id, None)
        values = level.values
        try:
            if isinstance(values, LevelRanges) and values.ranges:
                self._enter("form of the values", values=values_of.as_table(values))
                return
            if isinstance(values, LevelTable) and values.points:
                self._enter("form of the values", values=values_of.as_ranges(values))
                return
        except UserError as error:
            self.kind.set_value(self._form())
            self.table.refuse(str(error))
            return
        if values is not None:
            self._enter("form of the values", values=None)
        else:
            self.show_level(level, self.mark.is_assumed)

    def _enter_coefficient(self, row: Any, text: str, decimal: str) -> Any:
        return values_of.with_coefficient(self.shown_unit)(row, text, decimal)

    def _enter_level(self, row: Any, text: str, decimal: str) -> Any:
        return values_of.with_level(self.shown_unit)(row, text, decimal)

    def _shown(self, value: float | None) -> str:
        factor = FLUX_DENSITY_UNITS[self.shown_unit]
        return values_of.optional_text(value, factor, decimal_sign())

    def _range_columns(self) -> tuple[Column, ...]:
        return (
            Column(
                "From Hz",
                lambda r: values_of.optional_text(r.f_from, 1.0, decimal_sign()),
                values_of.with_frequency("f_from"),
                tip="Lowest frequency, included [Hz]", width=15,
            ),
            Column(
                "To Hz",
                lambda r: values_of.optional_text(r.f_to, 1.0, decimal_sign()),
                values_of.with_frequency("f_to"),
                tip="Highest frequency, included [Hz]", width=15,
            ),
            Column(
                "c", lambda r: self._shown(r.coefficient), self._enter_coefficient,
                tip="Coefficient c of c · f⁻ⁿ, f in Hz [chosen unit · Hzⁿ]; the level "
                "itself where n is 0", width=18,
            ),
            Column(
                "n", lambda r: values_of.optional_text(r.exponent, 1.0, decimal_sign()),
                values_of.with_exponent,
                tip="Exponent n: 0 is even, 1 falls as 1/f", width=10,
            ),
            Column(
                "Gives",
                lambda r: values_of.range_gives(r, self.shown_unit, decimal_sign()),
                tip="Level at the lowest and highest frequency [chosen unit]", width=26,
            ),
        )  # fmt: skip

    def _point_columns(self) -> tuple[Column, ...]:
        return (
            Column(
                "Hz",
                lambda r: values_of.optional_text(r.frequency, 1.0, decimal_sign()),
                values_of.with_frequency("frequency"), tip="Frequency [Hz]", width=24,
            ),
            Column(
                "Level", lambda r: self._shown(r.level), self._enter_level,
                tip="Level [chosen unit], or with a unit of its own: 0.2 mT", width=24,
            ),
        )  # fmt: skip


def _flowing(layout: Layout) -> tuple[float, ...]:
    """Frequencies that the circuits name. [Hz]"""
    named = {c.base_frequency for c in layout.circuits}
    named |= {line.frequency for c in layout.circuits for line in c.spectrum}
    return tuple(sorted(named))
