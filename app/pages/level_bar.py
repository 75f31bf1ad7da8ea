"""The bar above the drawing that asks for the distance to a level, and tells it."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QHideEvent, QKeyEvent, QResizeEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QVBoxLayout,
    QWidget,
)

from app.answers import Answers
from app.document import Document
from app.level_distance import (
    DistanceRequest,
    PlaceFactor,
    Reached,
    Target,
    factors,
    levels_of,
    targets,
    with_held,
)
from app.level_marks import offset_lines, told
from app.map_request import case_of, heights_of
from app.margin_values import Margins
from app.pages.profile_controls import choice
from app.panels.panel import Words
from app.theme import STEP
from app.view_state import ViewState
from engine.layout import Layout
from engine.picture import OffsetLines

NO_LEVEL = "Enter a reference level with its source under Ref. levels first."
NOWHERE = "nothing: lines only"

#: From this height of the window on, several places are told. [logical pixels]
_HIGH = 700


class LevelBar(QWidget):
    """Level and target; the answer in words, and as marks for the drawings.

    Signals
    -------
    found(Reached or None, PlaceFactor or None)
        What the drawings should show now.
    outdated(Reached)
        What they show no longer belongs to the layout.
    export_wanted()
        A file was asked for.
    closed()
    """

    found = Signal(object, object)
    outdated = Signal(object)
    export_wanted = Signal()
    closed = Signal()

    def __init__(self, document: Document, view_state: ViewState) -> None:
        super().__init__()
        self._document, self._view_state = document, view_state
        self._target: Target | None = None
        self._margins: Margins | None = None
        self._held: Layout | None = None
        self.answer: Reached | None = None
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self._ask)
        self.setAccessibleName("Distance to a reference level")
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Maximum)
        self.levels = choice("Reference level whose distance is sought", 60)
        self.levels.activated.connect(lambda _k: self._soon.start())
        self.targets = choice("What the largest distance is measured from", 75)
        self.targets.activated.connect(self._on_target)
        self.state, self.words = Words("", "warning"), Words("", "plain")
        self.state.setWordWrap(False)
        self.export = QPushButton("Export …")
        self.export.setToolTip(
            "The map with these lines and the distance as PNG or SVG, or the lines "
            "as CSV"
        )
        self.export.clicked.connect(lambda _on=False: self.export_wanted.emit())
        close = QPushButton("Close")
        close.setToolTip("Take the lines off the drawing (Esc)")
        close.clicked.connect(self.leave)
        row = QHBoxLayout()
        row.setSpacing(2 * STEP)
        for widget in (QLabel("Distance to"), self.levels, QLabel("from"),
                       self.targets, self.state):  # fmt: skip
            row.addWidget(widget)
        row.addStretch(1)
        row.addWidget(self.export)
        row.addWidget(close)
        box = QVBoxLayout(self)
        box.setContentsMargins(3 * STEP, STEP, 2 * STEP, STEP)
        box.setSpacing(STEP)
        box.addLayout(row)
        box.addWidget(self.words)
        self._answers = Answers("distance to the level", with_held, self)
        self._answers.ready.connect(self._show)
        document.changed.connect(self._on_changed)
        document.selection_changed.connect(self._on_selection)
        view_state.changed.connect(self._on_changed)
        self.setFocusProxy(self.levels)
        self.hide()

    # -- what is asked ------------------------------------------------------------

    def open(self) -> None:
        """Show the bar and look for the distance."""
        self.show()
        self._on_selection(self._document.selection)
        self._soon.start()
        self.setFocus(Qt.FocusReason.ShortcutFocusReason)

    def leave(self) -> None:
        """Take bar and lines away."""
        self.hide()
        self.closed.emit()

    def hold(self, on: bool) -> None:
        """Let the distance in the layout as it is stand beside the coming ones."""
        self._held = self._document.committed if on else None
        self._on_changed()

    def set_margins(self, margins: Margins) -> None:
        """Take the ratios at zones and receptors."""
        if margins.assessment is not None:
            self._margins = margins
            self._tell()

    def offsets(self, layout: Layout, heights: tuple[float, ...]) -> OffsetLines | None:
        """The lines as a map of that layout in a file shows them; None of others."""
        answer = self.answer
        if answer is None or self.isHidden():
            return None
        request = answer.request
        if request.layout is not layout or request.heights != heights:
            return None
        return offset_lines(answer)

    @property
    def is_idle(self) -> bool:
        """Nothing is being computed or waits to be asked."""
        return self._answers.is_idle and not self._soon.isActive()

    def close_worker(self) -> None:
        """Stop the thread, before the window goes."""
        self._document.changed.disconnect(self._on_changed)
        self._document.selection_changed.disconnect(self._on_selection)
        self._view_state.changed.disconnect(self._on_changed)
        self._soon.stop()
        self._answers.close()

    # -- events -------------------------------------------------------------------

    def hideEvent(self, event: QHideEvent) -> None:
        if self.isHidden():
            self._answers.forget()
            self.answer = None
            self.found.emit(None, None)
        super().hideEvent(event)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._make_room()

    def _make_room(self) -> None:
        """Let the drawing not take the last line of the words."""
        needed = self.words.heightForWidth(self.words.width())
        self.words.setMinimumHeight(max(0, needed))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.leave()
        else:
            super().keyPressEvent(event)

    def _on_changed(self, *_: object) -> None:
        if not self.isHidden():
            self._soon.start()

    def _on_selection(self, ids: frozenset[str]) -> None:
        """What is selected alone is measured from."""
        if self.isHidden() or len(ids) != 1:
            return
        own = [t for t in targets(self._document.layout) if t.item in ids]
        if own and (self._target is None or self._target.item not in ids):
            self._target = own[0]
            self._soon.start()

    def _on_target(self, index: int) -> None:
        self._target = self.targets.itemData(index)
        self._soon.start()

    # -- computing ----------------------------------------------------------------

    def _ask(self) -> None:
        layout = self._document.layout
        level = self._fill(layout.levels and self.levels.currentData())
        if not level:
            self._answers.forget()
            self.answer = None
            self.words.setText(NO_LEVEL)
            self.state.setText("")
            self.found.emit(None, None)
            return
        look = self._view_state.look
        heights, name = heights_of(layout, look)
        request = DistanceRequest(
            layout, case_of(layout, look.case).id, level, self._target, heights, name,
            self._held,
        )  # fmt: skip
        if self._answers.ask(request):
            self.state.setText("out of date" if self.answer else "being computed …")
            if self.answer is not None:
                self.outdated.emit(self.answer)

    def _fill(self, chosen: object) -> str:
        """Fill the choices; the id of the level to look for."""
        layout = self._document.layout
        levels = levels_of(layout)
        named = {id for zone in layout.zones for id in zone.levels}
        named |= {id for receptor in layout.receptors for id in receptor.levels}
        self.levels.clear()
        for level in sorted(levels, key=lambda v: v.id not in named):
            self.levels.addItem(level.title, level.id)
        self.levels.setCurrentIndex(max(0, self.levels.findData(chosen)))
        known = targets(layout)
        before = self._target
        same = [
            target
            for target in known
            if before and (target.item, target.side) == (before.item, before.side)
        ]
        self._target = same[0] if same else None
        self.targets.clear()
        self.targets.addItem(NOWHERE, None)
        for target in known:
            self.targets.addItem(target.title, target)
        row = 0 if self._target is None else 1 + known.index(self._target)
        self.targets.setCurrentIndex(row)
        return str(self.levels.currentData() or "")

    def _show(self, request: DistanceRequest, answer: object) -> None:
        if request != self._answers.asked or self.isHidden():
            return
        self.state.setText("")
        self.answer = answer if isinstance(answer, Reached) else None
        if self.answer is None:
            self.words.setText(str(answer))
            self.found.emit(None, None)
            return
        self._tell()

    def _tell(self) -> None:
        if self.answer is None:
            return
        parts = [told(self.answer)]
        found = self._factors(self.answer)
        if found:
            # In a low window the drawing needs the room.
            most = 4 if self.window().height() >= _HIGH else 1
            parts.append(
                "The calculated value equals the level at "
                + ", ".join(f"{f.times} × this case ({f.title})" for f in found[:most])
                + ", all its currents together"
            )
        self.words.setText(". ".join(parts) + ".")
        self._make_room()
        self.found.emit(self.answer, found[0] if found else None)

    def _factors(self, answer: Reached) -> tuple[PlaceFactor, ...]:
        """Where margins of the same layout are known."""
        margins = self._margins
        if margins is None or margins.layout is not answer.request.layout:
            return ()
        assert margins.assessment is not None
        return factors(margins.assessment, answer.request.case, answer.request.level)
