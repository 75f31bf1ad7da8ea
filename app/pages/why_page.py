"""The page that says where a value comes from: shares of circuits, and its retrace."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from PySide6.QtCore import QEvent
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QTabWidget,
    QVBoxLayout,
    QWidget,
)

from app.asking_page import AskingPage
from app.document import Document
from app.figures import write_figure
from app.messages import Messages
from app.pages.plain_table import PlainTable
from app.pages.profile_controls import choice
from app.pages.share_tree import ShareTree
from app.panels.panel import Words, button
from app.theme import LIGHT, STEP, qt_palette
from app.variant_acts import with_shown
from app.view_state import ViewState
from app.why_values import (
    Why,
    WhyPlace,
    WhyRequest,
    caption_text,
    head_text,
    net_current_texts,
    place_now,
    place_text,
    sentence,
    shares_csv,
    shares_tabs,
    with_held,
)
from app.wrapping import WrappingRow
from engine.layout import Layout
from engine.retrace import csv_text
from engine.section_currents import phasor_text
from engine.units import LENGTH_UNITS, in_unit, significant

#: Rows of a retrace in a picture, at most.
MOST_PRINTED = 120

NO_PLACE = (
    "Choose a place: select a receptor, press Why in the margins, or click an empty "
    "place of the drawing."
)


class WhyPage(AskingPage):
    """Follows document, selection and load case while it shows."""

    def __init__(
        self, document: Document, view_state: ViewState, messages: Messages
    ) -> None:
        super().__init__(
            "Why this value", document, messages,
            computed="contributions", work=with_held, file_name="why.png",
        )  # fmt: skip
        self._view_state = view_state
        self.place: WhyPlace | None = None
        self._others: list[WhyPlace] = []
        self.why: Why | None = None
        self._held: Layout | None = None
        self._build()
        self._follow(document.changed)
        self._follow(document.selection_changed, self._on_selection)
        self._follow(view_state.changed)
        self.setFocusProxy(self.tree)

    # -- what is asked ------------------------------------------------------------

    def show_place(self, place: WhyPlace) -> None:
        """Take the value at another place apart; a receptor's is followed."""
        self.place = place
        if not place.receptor:
            self._others = [p for p in self._others if p.title != place.title]
            self._others.append(place)
        self._soon.start()

    def hold(self, on: bool) -> None:
        """Let the values of the layout as it is stand beside the coming ones."""
        self._held = self._document.committed if on else None
        self._on_changed()

    @property
    def shown(self) -> Why | None:
        return self.why

    # -- building -----------------------------------------------------------------

    def _build(self) -> None:
        controls = QWidget()
        row = WrappingRow(controls, 2 * STEP, 0)
        self.places = choice("Place whose value is taken apart", 75)
        self.places.activated.connect(
            lambda k: self.show_place(self.places.itemData(k))
        )
        self.kinds: QComboBox = choice("AC: all frequencies above 0 Hz; DC: 0 Hz", 16)
        self.kinds.activated.connect(lambda _k: self._soon.start())
        for widget in (
            self.places,
            self.kinds,
            button("Copy as sentence", "Value, shares and what matters most, in words",
                   self.copy_sentence),
            button("Copy table", "The table in front, as cells for a spreadsheet",
                   self.copy_table),
            button("Export …", "As PNG, SVG or CSV, with its caption", self.export),
        ):  # fmt: skip
            row.addWidget(widget)
        self.put_beside_title(controls, self.state)
        self.told = Words("", "plain")
        self.column.addWidget(self.reason)
        self.column.addWidget(self.told)
        self.tree, self.table = ShareTree(), PlainTable("Retrace of the value")
        self.net = Words("")
        shares = QWidget()
        shares.setAutoFillBackground(True)
        box = QVBoxLayout(shares)
        box.setContentsMargins(0, 0, 0, 0)
        box.setSpacing(STEP)
        box.addWidget(self.tree, 1)
        box.addWidget(self.net)
        self.shares = shares
        retraced = QWidget()
        below = QHBoxLayout(retraced)
        below.setContentsMargins(0, 0, 0, 0)
        below.addWidget(self.table)
        self.tabs = QTabWidget()
        self.tabs.setAccessibleName("Why this value")
        self.tabs.setDocumentMode(True)
        self.tabs.addTab(shares, "Shares of circuits")
        self.tabs.addTab(retraced, "Retrace this value")
        self.tabs.setTabToolTip(0, "What each circuit adds to the value or cancels")
        self.tabs.setTabToolTip(1, "From the currents to the value, step by step")
        self.column.addWidget(self.tabs, 1)
        self._parts = (self.tabs, self.told)

    # -- events -------------------------------------------------------------------

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and hasattr(self, "tabs"):
            self.tree.viewport().update()

    def _on_selection(self, ids: frozenset[str]) -> None:
        found = [r for r in self._document.layout.receptors if r.id in ids]
        if len(found) == 1 and len(ids) == 1 and self.isVisible():
            self.show_place(WhyPlace(found[0].at, found[0].id))

    # -- computing ----------------------------------------------------------------

    def _ask(self) -> None:
        layout = self._document.layout
        receptors = layout.receptors
        if self.place is None and receptors:
            self.place = WhyPlace(receptors[0].at, receptors[0].id)
        if self.place is None:
            self._answers.forget()
            self._tell(NO_PLACE)
            return
        self.place = place_now(layout, self.place)
        self._fill_places()
        request = WhyRequest(
            layout, self._view_state.look.case, self.place,
            self.kinds.currentText(), self._held,
        )  # fmt: skip
        self._put(request, "The shares are being computed …")

    def _fill_places(self) -> None:
        layout = self._document.layout
        self.places.clear()
        found = [WhyPlace(r.at, r.id, "", r.levels) for r in layout.receptors]
        for place in (*found, *self._others):
            self.places.addItem(place_text(layout, place), place)
        places = [*found, *self._others]
        assert self.place is not None
        if self.place not in places:
            places.append(self.place)
            self.places.addItem(place_text(layout, self.place), self.place)
        self.places.setCurrentIndex(places.index(self.place))

    def _show(self, request: Any, answer: object) -> None:
        if self.place is None or request.place != self.place:
            return
        if not isinstance(answer, Why):
            self.why = None
            self._tell(str(answer))
            return
        self.why = answer
        self.state.setText("")
        self._tell("")
        self.kinds.clear()
        self.kinds.addItems(list(answer.kinds))
        self.kinds.setCurrentText(answer.shares.kind)
        self.kinds.setVisible(len(answer.kinds) > 1)
        self.told.setText(head_text(answer))
        self.tree.show_why(answer)
        found = net_current_texts(answer)
        self.net.setText(
            "1 A of net current would give here, its return far away: "
            + " · ".join(found)
            if found
            else ""
        )
        self.net.setVisible(bool(found))
        self.table.show_rows(*_retrace_rows(answer))

    # -- handing on ---------------------------------------------------------------

    def copy_sentence(self) -> None:
        """Put the value and its shares on the clipboard, in words."""
        self._copy("" if self.why is None else sentence(self.why), "sentence")

    def copy_table(self) -> None:
        """Put the shares or the retrace on the clipboard, as is in front."""
        text = ""
        if self.why is not None:
            is_shares = self.tabs.currentIndex() == 0
            text = shares_tabs(self.why) if is_shares else self.table.text()
        self._copy(text, "table")

    def write(self, path: Path) -> None:
        """Write what is in front: a picture, light as on paper, or its numbers.

        Raises
        ------
        UserError
            When the file cannot be written.
        """
        why = self.why
        if why is None:
            raise ValueError("nothing is shown")
        settings = why.request.layout.settings
        caption = with_shown(self._document, caption_text(why))
        told = [caption, head_text(why)]
        if self.tabs.currentIndex() == 0:
            told += [self.net.text()] if self.net.text() else []
            self._write_whole(path, ShareTree(), told, shares_csv(why))
            return
        rows = len(why.retraced.rows)
        if rows > MOST_PRINTED:
            told.append(f"The first {MOST_PRINTED} of {rows} rows; CSV has them all.")
        numbers = csv_text(
            why.retraced, unit=settings.flux_density_unit,
            length_unit=settings.length_unit,
        )  # fmt: skip
        self._write_whole(path, PlainTable("Retrace"), told, numbers)

    def _write_whole(
        self, path: Path, shown: ShareTree | PlainTable, told: list[str], numbers: str
    ) -> None:
        """Write a copy of a view that is large enough for all that is in it."""
        assert self.why is not None
        shown.setPalette(qt_palette(LIGHT))
        if isinstance(shown, ShareTree):
            shown.show_why(self.why)
        else:
            heads, rows, words = _retrace_rows(self.why)
            # The sum stands first.
            shown.show_rows(heads, rows[: MOST_PRINTED + 1], words)
        shown.show_whole()
        write_figure(path, shown, "\n".join(told), numbers)
        shown.deleteLater()


def _retrace_rows(why: Why) -> tuple[list[str], list[list[str]], int]:
    """Heads, rows and how many columns are words; the first row is the sum."""
    settings = why.request.layout.settings
    unit, length = settings.flux_density_unit, settings.length_unit
    heads = [
        "Conductor", "Stands for", "Frequency", "Current", f"Distance [{length}]",
        *(f"{axis} [{unit}]" for axis in "xyz"), f"share [{unit}]",
    ]  # fmt: skip
    sums = [sum(row.shares[k] for row in why.retraced.rows) for k in range(3)]
    rows = [
        ["All together", "", "", "", "", *(_share(v, unit) for v in sums),
         _share(why.retraced.total, unit)]
    ]  # fmt: skip
    for row in why.retraced.rows:
        current = phasor_text(row.current)
        if row.frequency == 0:
            current = f"{significant(row.current.real)} A".replace("-", "−")
        rows.append(
            [
                _conductor(why, row.item, row.conductor), row.role,
                f"{row.frequency:g} Hz", current,
                _length(row.distance, length),
                *(_share(v, unit) for v in row.shares), _share(row.share, unit),
            ]
        )  # fmt: skip
    return heads, rows, 2


def _conductor(why: Why, item: str, key: str) -> str:
    """A conductor's key with the item's title for its id."""
    title = why.names.get(item, item)
    return title + key.removeprefix(item) if key.startswith(f"{item}/") else key


def _share(tesla: float, unit: str) -> str:
    return significant(in_unit(tesla, unit), 4).replace("-", "−")


def _length(metres: float, unit: str) -> str:
    return significant(metres / LENGTH_UNITS[unit])
