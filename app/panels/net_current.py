"""What is left when the currents of a section are added: in words and as phasors."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QComboBox, QHBoxLayout, QVBoxLayout, QWidget

from app.panels.panel import Words, decimal_sign, scrolled
from app.panels.phasor_drawing import PhasorDrawing
from app.theme import BODY, STEP
from engine.circuits import LoadCase
from engine.currents import case_phasors
from engine.errors import UserError
from engine.layout import Layout
from engine.runs import Section
from engine.section_currents import (
    SectionCurrents,
    net_text,
    phasor_text,
    section_currents,
)

#: Terms that are listed one by one.
_MOST = 12


#: Width that the words need beside the phasors. [logical pixels]
_WORDS = 17 * BODY


class NetCurrent(QWidget):
    """The net current of a section in a load case."""

    def __init__(self) -> None:
        super().__init__()
        self._currents: tuple[SectionCurrents, ...] = ()
        self.phasors = PhasorDrawing()
        self.net = Words(style="plain")
        font = self.net.font()
        font.setPixelSize(BODY)
        font.setBold(True)
        self.net.setFont(font)
        self._terms = Words()
        self._frequencies = QComboBox()
        self._frequencies.setAccessibleName("Frequency")
        self._frequencies.setToolTip("Whose phasors are drawn, in hertz")
        self._frequencies.activated.connect(lambda _index: self._show_phasors())
        told = QWidget()
        words = QVBoxLayout(told)
        words.setContentsMargins(0, 0, 0, 0)
        words.setSpacing(2 * STEP)
        words.addWidget(self.net)
        words.addWidget(self._frequencies, 0, Qt.AlignmentFlag.AlignLeft)
        words.addWidget(self._terms)
        words.addStretch(1)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(3 * STEP)
        row.addWidget(self.phasors)
        area = scrolled(told, "Net current of the section")
        area.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        area.setMinimumWidth(34 * STEP)
        row.addWidget(area, 1)

    def resizeEvent(self, event: QResizeEvent) -> None:
        # The words come first: they say in figures what the phasors show.
        room = self.width() - _WORDS
        self.phasors.setVisible(room >= self.phasors.minimumWidth())
        side = min(self.phasors.sizeHint().width(), room)
        self.phasors.setMaximumWidth(max(side, self.phasors.minimumWidth()))
        super().resizeEvent(event)

    def show_section(self, layout: Layout, case: LoadCase, section: Section) -> None:
        """Show the currents of a section in a load case."""
        try:
            self._currents = section_currents(case_phasors(layout, case), section)
        except UserError as error:
            self._currents = ()
            self.net.setText(str(error))
        else:
            text = net_text(self._currents, decimal_sign())
            self.net.setText(f"{text} · {case.title}")
        names = [_component_text(part) for part in self._currents]
        box = self._frequencies
        if names != [box.itemText(i) for i in range(box.count())]:
            box.clear()
            box.addItems(names)
        box.setVisible(len(names) > 1)
        self._show_phasors()

    def _show_phasors(self) -> None:
        place = max(self._frequencies.currentIndex(), 0)
        part = self._currents[place] if place < len(self._currents) else None
        self.phasors.show_currents(part)
        self._terms.setText("" if part is None else _terms_text(part))


def _component_text(part: SectionCurrents) -> str:
    component = part.component
    base = "DC" if component.frequency == 0 else f"{component.frequency:g} Hz"
    return f"{base}, {component.group}" if component.group else base


def _terms_text(part: SectionCurrents) -> str:
    """The terms one by one, so that the drawing can be checked."""
    several = len({circuit for circuit, _, _ in part.terms}) > 1
    shown = []
    for circuit, label, value in part.terms[:_MOST]:
        name = f"{circuit} {label}" if several else label
        shown.append(f"{name} {phasor_text(value, decimal_sign())}")
    more = len(part.terms) - len(shown)
    return " · ".join(shown) + (f" and {more} more" if more else "")
