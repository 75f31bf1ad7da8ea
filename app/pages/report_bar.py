"""The bar above the pages of a report: which page, which section, how large."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QSignalBlocker, Qt
from PySide6.QtWidgets import QComboBox, QSpinBox, QToolButton, QWidget

from app.pages.profile_controls import choice
from app.pages.report_sheets import WHOLE, WIDTH, ReportSheets
from app.panels.panel import plain_tip
from app.theme import STEP, scaled
from app.wrapping import WrappingRow
from engine.exchange.pdf_pages import Section

#: Zooms that are offered. [share of the paper's size]
_SHARES = (0.5, 0.75, 1.0, 1.5, 2.0, 3.0)


class ReportBar(QWidget):
    """Leads through the pages that `sheets` shows, and follows them."""

    def __init__(self, sheets: ReportSheets) -> None:
        super().__init__()
        self._sheets = sheets
        self._sections: tuple[Section, ...] = ()
        self.previous = _turn("‹", "Previous page (Page Up)", self._turn_by, -1)
        self.next = _turn("›", "Next page (Page Down)", self._turn_by, 1)
        self.number = QSpinBox()
        self.number.setAccessibleName("Page")
        self.number.setToolTip("Number of the page that is read")
        self.number.setKeyboardTracking(False)
        self.number.setButtonSymbols(QSpinBox.ButtonSymbols.NoButtons)
        self.number.setAlignment(Qt.AlignmentFlag.AlignRight)
        self.number.valueChanged.connect(lambda page: sheets.go_to(page - 1))
        self.sections: QComboBox = choice("Section of the report to go to", 44)
        self.sections.setPlaceholderText("Go to a section")
        self.sections.activated.connect(self._go_to_section)
        self.zooms: QComboBox = choice("Size of the pages on the screen", 26)
        for text, zoom in (
            (WIDTH, WIDTH),
            (WHOLE, WHOLE),
            *((f"{100 * share:.0f} %", share) for share in _SHARES),
        ):
            self.zooms.addItem(text, zoom)
        self.zooms.activated.connect(lambda k: sheets.set_zoom(self.zooms.itemData(k)))
        row = WrappingRow(self, 2 * STEP, 0)
        for widget in (
            self.previous, self.number, self.next, self.sections, self.zooms,
        ):  # fmt: skip
            row.addWidget(widget)
        sheets.page_changed.connect(self._on_page)
        sheets.zoomed.connect(self._on_zoomed)
        self.show_sections(())

    def show_sections(self, sections: tuple[Section, ...]) -> None:
        """Offer the sections of other pages."""
        self._sections = sections
        self.sections.clear()
        for k, section in enumerate(sections):
            title = " ".join(section.title.split())
            self.sections.addItem(f"{'    ' * section.depth}{title}")
            self.sections.setItemData(k, plain_tip(title), Qt.ItemDataRole.ToolTipRole)
        self._on_page(self._sheets.page)

    def _turn_by(self, pages: int) -> None:
        self._sheets.go_to(self._sheets.page + pages)

    def _go_to_section(self, row: int) -> None:
        self._sheets.go_to_section(self._sections[row])
        self._sheets.setFocus(Qt.FocusReason.OtherFocusReason)

    def _on_page(self, page: int) -> None:
        count = self._sheets.count
        with QSignalBlocker(self.number):
            self.number.setRange(min(1, count), count)
            self.number.setSuffix(f" of {count}")
            self.number.setValue(page + 1 if count else 0)
        for widget in (self.number, self.sections, self.zooms):
            widget.setEnabled(count > 0)
        self.previous.setEnabled(page > 0)
        self.next.setEnabled(page + 1 < count)
        self.sections.setEnabled(bool(self._sections))
        self.sections.setCurrentIndex(self._sheets.section_shown())

    def _on_zoomed(self, share: float) -> None:
        if share == 0.0:
            self.zooms.setCurrentIndex(0)
            return
        # Between two that are offered nothing is named.
        self.zooms.setCurrentIndex(-1)
        self.zooms.setPlaceholderText(f"{100 * share:.0f} %")


def _turn(sign: str, tip: str, turn_by: Callable[[int], None], by: int) -> QToolButton:
    made = QToolButton()
    made.setText(sign)
    made.setToolTip(tip)
    made.setAccessibleName(tip.partition(" (")[0])
    made.setAutoRaise(True)
    made.setFixedWidth(scaled(7 * STEP))
    made.clicked.connect(lambda _on=False: turn_by(by))
    return made
