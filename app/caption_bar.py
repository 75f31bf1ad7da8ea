"""The caption above the drawing: what the map shows, each part a choice.

The same words stand on every export: quantity, heights or upright plane, load case.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from PySide6.QtCore import QEvent, Qt, Signal
from PySide6.QtGui import QAction, QResizeEvent
from PySide6.QtWidgets import (
    QComboBox,
    QHBoxLayout,
    QLabel,
    QMenu,
    QSizePolicy,
    QToolButton,
    QWidget,
)

from app.document import Document
from app.elevation_plane import (
    ALONG,
    ELEVATIONS,
    PLAN_VIEW,
    drawn_lines,
    line_of,
    plane_text,
)
from app.elided_choice import ElidedChoice
from app.map_request import height_text, heights_of
from app.theme import BODY, STEP, theme_for
from app.variant_acts import with_shown
from app.view_state import LAYERS, ViewState
from app.wrapping import WrappingRow, group_in_row
from engine.assessment import zone_floor
from engine.currents import case_phasors
from engine.errors import UserError
from engine.layout import Layout

QUANTITY, DIRECT = "RMS flux density", "Flux density, DC"

#: What the drawing follows of the caption; pages in its place less, or nothing.
OF_DRAWING = frozenset(
    {"view", "quantity", "zone", "height", "case", "variant", "storey", "layers"}
)

#: A name is shown to this width, and shortened to the least before a row is added.
_WIDEST, _LEAST = 24 * BODY, 9 * BODY


#: A longer state is shortened, and whole in its tooltip. [logical pixels]
_LONGEST_STATE = 60 * STEP


def caption(document: Document, view_state: ViewState) -> str:
    """The caption in one line, as exports print it."""
    layout, look = document.layout, view_state.look
    where = plane_text(layout, look, look.view) or heights_of(layout, look)[1]
    text = f"{quantity(layout, look.case)} · {where} · {case_text(layout, look.case)}"
    return with_shown(document, text)


def quantity(layout: Layout, case: str) -> str:
    """What the map of a load case shows: RMS above 0 Hz, or the direct field."""
    return DIRECT if is_direct(layout, case) else QUANTITY


def is_direct(layout: Layout, case: str) -> bool:
    """Whether nothing but direct current flows in a load case."""
    chosen = next((c for c in layout.cases if c.id == case), layout.cases[0])
    try:
        flowing = case_phasors(layout, chosen).components
    except UserError:
        return False
    return bool(flowing) and all(c.frequency == 0.0 for c in flowing)


def case_title(layout: Layout, case: str) -> str:
    """The name of the load case shown."""
    cases = layout.cases
    return next((c.title for c in cases if c.id == case), cases[0].title)


def case_text(layout: Layout, case: str) -> str:
    """ "case Highest operation"; a title that says "case" itself stands alone."""
    return _with_case(case_title(layout, case))


def _with_case(title: str) -> str:
    return title if "case" in title.lower().split() else f"case {title}"


class CaptionBar(QWidget):
    """View, quantity, zone, height, load case and storey of the drawing; its layers.

    Signals
    -------
    state_told(text)
        Nothing to compute, out of date, still coarse: shown at the right end.
    """

    state_told = Signal(str)

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__()
        self._document = document
        self._view_state = view_state
        self._view = _choice("View in front: plan, elevations, along a drawn line")
        self._plane = QLabel()
        self._plane.setToolTip("Where the map of the elevation stands")
        self._zone = _choice("Zone whose heights the map shows")
        self._height = _choice("Height of the map above the datum [m]")
        self._case = _choice("Load case of the map")
        self._storey = _choice("Storey that is drawn upon")
        self._variant = _choice("Base or variant that is shown and edited")
        self._state = QLabel()
        self._layers = QToolButton()
        self._layers.setText("Layers")
        self._layers.setToolTip("Which layers of the drawing show")
        self._layers.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self._layers.setAutoRaise(True)
        self._layers.setMenu(self._layer_menu())
        self._quantity = QLabel(QUANTITY)
        self._followed = OF_DRAWING
        self._build()
        self._view.activated.connect(self._on_view)
        self._zone.activated.connect(self._on_zone)
        self._height.activated.connect(self._on_height)
        self._case.activated.connect(self._on_case)
        self._storey.activated.connect(self._on_storey)
        self._variant.activated.connect(self._on_variant)
        document.changed.connect(self._fill)
        document.whole_changed.connect(self._fill)
        view_state.changed.connect(self._fill)
        self._fill()

    def _build(self) -> None:
        """The choices in one row, or in more where they have to be; the rest beside."""
        self._choices = QWidget()
        row = WrappingRow(self._choices, gap=STEP, margin=0)
        self._dots: dict[QWidget, QLabel] = {}
        self._groups: dict[QWidget, QWidget] = {}
        self._on: set[QWidget] = set()
        self._names = (
            self._case, self._variant, self._zone, self._storey, self._view,
        )  # fmt: skip
        for widget in (
            self._view, self._quantity, self._plane, self._zone, self._height,
            self._case, self._variant, self._storey,
        ):  # fmt: skip
            group, inner = group_in_row()
            self._dots[widget], self._groups[widget] = QLabel("·"), group
            inner.addWidget(self._dots[widget])
            inner.addWidget(widget)
            row.addWidget(group)
        whole = QHBoxLayout(self)
        whole.setContentsMargins(2 * STEP, 0, 2 * STEP, 0)
        whole.setSpacing(STEP)
        whole.addWidget(self._choices, 1)
        for beside in (self._state, self._layers):
            whole.addWidget(beside, 0, Qt.AlignmentFlag.AlignTop)
        self._state.setContentsMargins(0, STEP, 0, 0)
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Minimum)

    def follow(self, parts: frozenset[str]) -> None:
        """Show only what the page in the drawing's place follows; nothing, no bar."""
        self._followed = parts
        self._fill()
        self.setVisible(bool(self._on))

    def tell(self, text: str) -> None:
        """Say at the right end what the map's state is; empty for nothing."""
        metrics, end = self._state.fontMetrics(), Qt.TextElideMode.ElideRight
        shown = metrics.elidedText(text, end, _LONGEST_STATE)
        self._state.setText(shown)
        self._state.setToolTip("" if shown == text else text)
        self._state.setAccessibleName(text)
        self._fit()
        self.state_told.emit(text)

    def changeEvent(self, event: QEvent) -> None:
        if event.type() == QEvent.Type.PaletteChange:
            self._state.setStyleSheet(f"color: {theme_for(self.palette()).muted};")
        super().changeEvent(event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        self._fit()
        super().resizeEvent(event)

    def _fit(self) -> None:
        """One row while that can be: the storey goes first, then the quantity.

        The legend names the quantity too. Then names are shortened, never a height;
        where even that does not help, they go on in a further row, whole.
        """
        wide = {part: self._width_of(part) for part in self._groups if part in self._on}
        gap = self._dots[self._view].sizeHint().width() + 2 * STEP
        room = self._room() + gap
        lacking = sum(wide.values()) + gap * len(wide) - room
        for part in (self._storey, self._quantity):
            if lacking > 0 and part in wide:
                lacking -= wide.pop(part) + gap
        names = [box for box in self._names if box in wide]
        spare = {box: max(0, wide[box] - _LEAST) for box in names}
        if lacking > sum(spare.values()):
            lacking = 0
        for box in names:
            given = min(max(0, lacking), spare[box])
            box.setFixedWidth(wide[box] - given)
            lacking -= given
        self._height.setFixedWidth(self._height.width_of_text())
        # Whatever is shown anew lays everything out again: only what changes.
        first = next(iter(wide), None)
        for each, group in self._groups.items():
            group.setVisible(each in wide)
            self._dots[each].setVisible(each is not first)
        self._choices.updateGeometry()

    def _room(self) -> int:
        beside = self._layers.sizeHint().width() if self._wants("layers") else 0
        if self._state.text():
            beside += self._state.sizeHint().width() + STEP
        return self.width() - beside - 8 * STEP

    @staticmethod
    def _width_of(part: QWidget) -> int:
        if isinstance(part, ElidedChoice):
            return min(part.width_of_text(), _WIDEST)
        return part.sizeHint().width()

    def _wants(self, part: str) -> bool:
        return part in self._followed

    def _show(self, choice: QWidget, shown: bool) -> None:
        """Have a choice or a text shown, where there is room for it."""
        (self._on.add if shown else self._on.discard)(choice)

    def _layer_menu(self) -> QMenu:
        menu = QMenu(self)
        for layer in LAYERS:
            action = QAction(layer, menu, checkable=True, checked=True)
            action.toggled.connect(lambda on, name=layer: self._show_layer(name, on))
            menu.addAction(action)
        return menu

    def _show_layer(self, layer: str, shown: bool) -> None:
        hidden = self._view_state.look.hidden - {layer}
        self._view_state.set(hidden=hidden if shown else hidden | {layer})

    def _fill(self, *_: object) -> None:
        layout, look = self._document.layout, self._view_state.look
        zones = [(zone.title, zone.id) for zone in layout.zones]
        _refill(self._zone, zones, look.zone)
        where = plane_text(layout, look, look.view)
        self._plane.setText(where)
        # The view's own name says the line already.
        is_said = look.view == ALONG or not self._wants("view")
        self._show(self._plane, bool(where) and not is_said)
        self._show(self._view, self._wants("view"))
        self._layers.setVisible(self._wants("layers"))
        upright = bool(where) and self._wants("view")
        self._show(self._zone, bool(zones) and not upright and self._wants("zone"))
        self._show(self._height, not upright and self._wants("height"))
        self._fill_view(layout)
        _refill(self._height, self._heights(layout), look.height)
        cases = [(_with_case(case.title), case.id) for case in layout.cases]
        _refill(self._case, cases, look.case)
        variants: list[tuple[str, object]] = [("base", None)]
        variants += [(v.title, v.id) for v in self._document.whole.variants]
        chosen = self._document.variant
        _refill(self._variant, variants, None if chosen is None else chosen.id)
        self._show(self._variant, len(variants) > 1 and self._wants("variant"))
        self._show(self._case, self._wants("case"))
        storeys = [(storey.title, storey.id) for storey in layout.storeys]
        _refill(self._storey, storeys, look.storey)
        self._show(self._storey, len(storeys) > 1 and self._wants("storey"))
        self._quantity.setText(quantity(layout, look.case))
        self._show(self._quantity, self._wants("quantity"))
        self._fit()

    def _fill_view(self, layout: Layout) -> None:
        look = self._view_state.look
        views: list[tuple[str, object]] = [
            (name, (name, "", 0)) for name in (PLAN_VIEW, *ELEVATIONS)
        ]
        views += [
            (f"Along {line.title}", (ALONG, line.profile, line.leg))
            for line in drawn_lines(layout)
        ]
        shown = line_of(layout, look) if look.view == ALONG else None
        chosen = (look.view, "", 0)
        if shown is not None:
            chosen = (ALONG, shown.profile, shown.leg)
        _refill(self._view, views, chosen)

    def _heights(self, layout: Layout) -> list[tuple[str, float | None]]:
        look = self._view_state.look
        zone = next((z for z in layout.zones if z.id == look.zone), None)
        if zone is None and layout.zones:
            zone = layout.zones[0]
        heights: list[tuple[str, float | None]]
        if zone is None:
            # Without a zone the map lies at one height above the lowest floor.
            heights = [(heights_of(layout, replace(look, height=None))[1], None)]
        else:
            floor = zone_floor(layout, zone) or 0.0
            heights = [("largest over heights", None)]
            heights += [
                (height_text(layout, floor + h, zone), floor + h) for h in zone.heights
            ]
        if look.height is not None and look.height not in [z for _, z in heights]:
            heights.append((height_text(layout, look.height, zone), look.height))
        return heights

    def _on_view(self, index: int) -> None:
        view, line, leg = self._view.itemData(index)
        if view == ALONG:
            self._view_state.set(view=view, line=line, leg=leg)
        else:
            self._view_state.set(view=view)

    def _on_zone(self, index: int) -> None:
        self._view_state.set(zone=self._zone.itemData(index), height=None)

    def _on_height(self, index: int) -> None:
        self._view_state.set(height=self._height.itemData(index))

    def _on_case(self, index: int) -> None:
        self._view_state.set(case=self._case.itemData(index))

    def _on_variant(self, index: int) -> None:
        self._document.choose(self._variant.itemData(index))

    def _on_storey(self, index: int) -> None:
        self._view_state.set(storey=self._storey.itemData(index))


def _choice(tip: str) -> ElidedChoice:
    box = ElidedChoice()
    box.setToolTip(tip)
    box.setAccessibleName(tip)
    box.setFrame(False)
    box.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
    box.setFocusPolicy(Qt.FocusPolicy.TabFocus)
    box.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Fixed)
    return box


def _refill(
    box: QComboBox, entries: Sequence[tuple[str, object]], chosen: object
) -> None:
    """Put `entries` (text, data) into `box`, with `chosen` or else the first shown."""
    shown = [(box.itemText(i), box.itemData(i)) for i in range(box.count())]
    if shown != entries:
        box.clear()
        for text, data in entries:
            box.addItem(text, data)
    index = next((i for i, (_, data) in enumerate(entries) if data == chosen), 0)
    box.setCurrentIndex(index if entries else -1)
    # What is shortened can be read whole here.
    box.setToolTip(f"{box.accessibleName()}: {box.currentText()}")
