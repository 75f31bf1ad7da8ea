"""The spectrum of a circuit: a table of its frequencies and their bars.

Bars with an unknown offset to the fundamental are outlined, the others filled.
"""

from __future__ import annotations

from collections.abc import Callable

import pyqtgraph as pg
from msgspec.structs import replace
from PySide6.QtCore import QEvent
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QWidget

from app.panels.panel import Words, column, decimal_sign
from app.panels.table import Column, RowsTable
from app.theme import STEP, theme_for
from engine.circuits import Circuit, SpectrumLine
from engine.edits import checked
from engine.errors import UserError
from engine.spectra import frequency_key
from engine.typed_numbers import number_text, typed_quantity

_ALL_LINES = "all lines"
_HERTZ = {"Hz": 1.0, "kHz": 1e3}
_SIZES = {"%": 0.01, "A": 1.0, "kA": 1e3, "mA": 1e-3}


def size_text(line: SpectrumLine, decimal: str = ".") -> str:
    """How large a frequency is: "12 %" of the fundamental, or "3 A"."""
    if line.rms is not None:
        return f"{number_text(line.rms, decimal)} A"
    if line.ratio is None:
        return ""
    return f"{number_text(100 * line.ratio, decimal)} %"


def with_size(line: SpectrumLine, text: str, decimal: str) -> SpectrumLine:
    """The line with a size in per cent of the fundamental (bare number) or in amperes.

    Raises
    ------
    UserError
        When it is neither.
    """
    value = typed_quantity(text, _SIZES, "%", decimal)
    if value < 0:
        raise UserError("A current is 0 or more; a turned direction is an offset 180°.")
    if any(text.strip().endswith(unit) for unit in ("A", "a")):
        return replace(line, ratio=None, rms=value)
    return replace(line, ratio=value, rms=None)


def offset_text(line: SpectrumLine, decimal: str = ".") -> str:
    """The angle to the fundamental, or that it is unknown."""
    if line.offset is None:
        return "unknown"
    return f"{number_text(line.offset, decimal)}°"


def with_offset(line: SpectrumLine, text: str, decimal: str) -> SpectrumLine:
    """The line with another offset; empty or "unknown": not known.

    Raises
    ------
    UserError
        When it is no angle.
    """
    if text.strip().lower() in ("", "unknown", "?"):
        return replace(line, offset=None)
    return replace(line, offset=typed_quantity(text, {"°": 1.0}, "°", decimal))


def with_frequency(line: SpectrumLine, text: str, decimal: str) -> SpectrumLine:
    """The line at another frequency.

    Raises
    ------
    UserError
        When it is no frequency.
    """
    frequency = typed_quantity(text, _HERTZ, "Hz", decimal)
    if not 0 <= frequency <= 1e6:
        raise UserError("A frequency lies between 0 and 1000 kHz.")
    return replace(line, frequency=frequency)


def with_label(line: SpectrumLine, text: str, _decimal: str) -> SpectrumLine:
    """The line for one conductor, or for every line."""
    text = text.strip()
    return replace(line, label="" if text in ("", _ALL_LINES, "all") else text)


def next_line(circuit: Circuit, lines: tuple[SpectrumLine, ...]) -> SpectrumLine:
    """A further frequency: the next odd multiple of the base, of no current yet."""
    base = circuit.base_frequency or 50.0
    present = {frequency_key(line.frequency) for line in lines}
    order = 2 if circuit.base_frequency == 0 else 3
    while frequency_key(order * base) in present:
        order += 2
    return SpectrumLine(frequency=order * base, ratio=0.0)


def bars(circuit: Circuit, largest: float | None) -> list[tuple[float, float, bool]]:
    """Frequency [Hz], size [% of the fundamental] and whether its offset is known.

    Parameters
    ----------
    circuit : Circuit
        Its spectrum.
    largest : float or None
        Largest current of a line at the base frequency, where there is one. [A]
    """
    found: dict[float, tuple[float, bool]] = {}
    for line in circuit.spectrum:
        if line.ratio is not None:
            size = 100 * line.ratio
        elif line.rms is not None and largest:
            size = 100 * line.rms / largest
        else:
            continue
        before, known = found.get(line.frequency, (0.0, True))
        known = known and line.offset is not None
        found[line.frequency] = (max(before, size), known)
    return [(f, size, known) for f, (size, known) in sorted(found.items())]


class SpectrumEditor(QWidget):
    """Edits the spectrum of one circuit.

    Attributes
    ----------
    table : RowsTable
    """

    def __init__(self, enter: Callable[[tuple[SpectrumLine, ...], str], None]) -> None:
        """`enter` is called with the new spectrum and a sentence of what was done."""
        super().__init__()
        self._enter = enter
        self._circuit = Circuit(id="none")
        self._largest: float | None = None
        self.table = RowsTable(
            _columns(),
            name="Spectrum",
            new_row=lambda rows: next_line(self._circuit, rows),
        )
        self.table.entered.connect(self._on_entered)
        self.add_button = QPushButton("Add frequency")
        self.add_button.setToolTip("Add the next odd multiple of the base frequency")
        self.add_button.clicked.connect(self._on_add)
        self.remove_button = QPushButton("Remove")
        self.remove_button.setToolTip("Remove the frequencies of the selected rows")
        self.remove_button.clicked.connect(self._on_remove)
        self.plot = pg.PlotWidget(background=None)
        self.plot.setFixedHeight(35 * STEP)
        self.plot.setMouseEnabled(False, False)
        self.plot.setMenuEnabled(False)
        self.plot.hideButtons()
        self.plot.setAccessibleName("Spectrum as bars")
        self.plot.setToolTip(
            "Size of each frequency in % of the fundamental; outlined bars have an "
            "unknown offset"
        )
        self.words = Words()
        buttons = QHBoxLayout()
        buttons.addWidget(self.add_button)
        buttons.addWidget(self.remove_button)
        buttons.addStretch(1)
        box = column(self)
        box.addWidget(self.table)
        box.addLayout(buttons)
        box.addWidget(self.plot)
        box.addWidget(self.words)

    def show_circuit(self, circuit: Circuit, largest: float | None) -> None:
        """Show a circuit's spectrum; `largest` is its largest line current. [A]"""
        self._circuit, self._largest = circuit, largest
        self.table.set_rows(circuit.spectrum)
        self.table.fit_height(3, 8)
        self._draw()

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "words"):
            self.table.colour()
            self._draw()
        super().changeEvent(event)

    def _draw(self) -> None:
        theme = theme_for(self.palette())
        found = bars(self._circuit, self._largest)
        item = self.plot.getPlotItem()
        item.clear()
        width = 0.5 * (self._circuit.base_frequency or 50.0)
        for known in (True, False):
            group = [(f, size) for f, size, is_known in found if is_known is known]
            if group:
                item.addItem(
                    pg.BarGraphItem(
                        x=[f for f, _ in group],
                        height=[size for _, size in group],
                        width=width,
                        pen=pg.mkPen(theme.accent, width=1.5),
                        brush=pg.mkBrush(theme.accent if known else None),
                    )
                )
        for name, title in (("bottom", "Hz"), ("left", "%")):
            axis = item.getAxis(name)
            axis.setPen(pg.mkPen(theme.line))
            axis.setTextPen(pg.mkPen(theme.text))
            axis.setLabel(title)
            axis.enableAutoSIPrefix(False)
        last = max((f for f, _, _ in found), default=350.0)
        top = max((size for _, size, _ in found), default=10.0) or 10.0
        self.plot.setXRange(0, last + 2 * width, padding=0)
        self.plot.setYRange(0, 1.1 * top, padding=0)
        self.plot.setVisible(bool(found))
        self.words.setText(self._said(found))

    def _said(self, found: list[tuple[float, float, bool]]) -> str:
        if not self._circuit.spectrum:
            return (
                "Harmonics: none entered. Add a frequency, or paste rows of frequency, "
                "line, size and offset."
            )
        open_ones = [f for f, _, known in found if not known]
        if not open_ones:
            return ""
        sign = decimal_sign()
        listed = ", ".join(f"{number_text(f, sign)} Hz" for f in open_ones)
        return (
            f"Outlined: the offset at {listed} is unknown. RMS values stay exact where "
            "this circuit is alone at the frequency; sums with others are bounds."
        )

    def _on_entered(self, rows: tuple[SpectrumLine, ...], sentence: str) -> None:
        try:
            lines = tuple(checked_line(row) for row in rows)
            self._enter(lines, sentence)
        except UserError as error:
            self.table.refuse(str(error))

    def _on_add(self) -> None:
        rows = self.table.rows
        self._on_entered((*rows, next_line(self._circuit, rows)), "Add a frequency")
        self.table.set_current(len(self.table.rows) - 1, 0)
        # What is typed now is meant for the new row.
        self.table.view.setFocus()

    def _on_remove(self) -> None:
        chosen = {i.row() for i in self.table.view.selectionModel().selectedIndexes()}
        rows = tuple(r for i, r in enumerate(self.table.rows) if i not in chosen)
        if len(rows) < len(self.table.rows):
            self._on_entered(rows, "Remove a frequency")


def checked_line(line: SpectrumLine) -> SpectrumLine:
    """The line with its values as a layout may hold them.

    Raises
    ------
    UserError
        When one is out of range.
    """
    return checked(Circuit(id="spectrum", spectrum=(line,))).spectrum[0]


def _columns() -> tuple[Column, ...]:
    return (
        Column(
            "Frequency",
            lambda line: f"{number_text(line.frequency, decimal_sign())} Hz",
            with_frequency,
            tip="Frequency [Hz]; 0 Hz is a direct part",
            width=21,
        ),
        Column(
            "Line",
            lambda line: line.label or _ALL_LINES,
            with_label,
            tip="One conductor, or all lines",
            width=18,
        ),
        Column(
            "Size",
            lambda line: size_text(line, decimal_sign()),
            with_size,
            tip="In % of the conductor's own fundamental, or in A",
            width=18,
        ),
        Column(
            "Offset",
            lambda line: offset_text(line, decimal_sign()),
            with_offset,
            tip="Angle [°] besides order × angle of the fundamental; or unknown",
            width=20,
        ),
    )
