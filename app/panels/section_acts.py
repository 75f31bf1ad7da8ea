"""Buttons that change a section: swap, mirror, sets, conductors, free."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QGridLayout, QPushButton, QWidget

from app.theme import STEP
from engine.errors import UserError
from engine.formations import as_free, with_sets
from engine.runs import FreeSection, ParallelSets, Section
from engine.section_edits import Axis, mirrored, swapped, with_conductor, without
from engine.sections import slots

#: Gives a section, or a section with the new names of its slots.
Change = Callable[[Section], Any]

_LABELS = ("L1", "L2", "L3", "N", "PE")

#: Conductors that a sentence names one by one.
_MOST = 4


class SectionActs(QWidget):
    """Acts on the section and its chosen conductors.

    Signals
    -------
    asked(words, change)
        An edit: the beginning of its sentence, before the run, and what it does.
    """

    asked = Signal(str, object)

    def __init__(self) -> None:
        super().__init__()
        self._section: Section | None = None
        self._names: tuple[str, ...] = ()
        self._circuits: tuple[str, ...] = ()
        self.buttons: dict[str, QPushButton] = {}
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setSpacing(STEP)
        acts: dict[str, tuple[str, str, Callable[[], None]]] = {
            "swap": ("Swap two", "The two chosen conductors change places", self._swap),
            "free": ("Make free", "Every conductor has its own place", self._free),
            "left-right": (
                "Mirror left–right",
                "The order as a mirror shows it, left to right",
                lambda: self._mirror("left-right"),
            ),
            "top-bottom": (
                "Mirror top–bottom",
                "The order as a mirror shows it, top to bottom",
                lambda: self._mirror("top-bottom"),
            ),
            "more": ("Add a set", "One more parallel set", lambda: self._sets(1)),
            "fewer": ("Remove a set", "The last set goes", lambda: self._sets(-1)),
            "add": ("Add conductor", "One more conductor", self._add),
            "remove": ("Remove conductor", "The chosen ones go (Del)", self._remove),
        }
        for i, (name, (words, tip, act)) in enumerate(acts.items()):
            button = QPushButton(words)
            button.setToolTip(tip)
            button.clicked.connect(lambda _checked=False, act=act: act())
            grid.addWidget(button, i // 2, i % 2)
            self.buttons[name] = button

    def show_section(
        self, section: Section, names: frozenset[str], circuits: tuple[str, ...]
    ) -> None:
        """Act on this section from now on; `circuits` are the layout's."""
        self._section, self._circuits = section, circuits
        try:
            held = slots(section)
        except UserError:
            held = ()
        self._names = tuple(slot.name for slot in held if slot.name in names)
        n_sets = len(section.orders) if isinstance(section, ParallelSets) else 1
        self.buttons["swap"].setEnabled(len(self._names) == 2)
        self.buttons["remove"].setEnabled(bool(self._names))
        self.buttons["fewer"].setEnabled(n_sets > 1)
        self.buttons["free"].setEnabled(not isinstance(section, FreeSection))

    def _swap(self) -> None:
        one, two = self._names
        self.asked.emit(f"Swap {one} and {two} in", lambda s: swapped(s, one, two))

    def _free(self) -> None:
        self.asked.emit("Free the conductors of", as_free)

    def _mirror(self, axis: Axis) -> None:
        words = axis.replace("-", " to ")
        self.asked.emit(f"Mirror the order {words} in", lambda s: mirrored(s, axis))

    def _sets(self, more: int) -> None:
        section = self._section
        held = len(section.orders) if isinstance(section, ParallelSets) else 1
        words = "Add a set in" if more > 0 else "Remove a set in"
        self.asked.emit(words, lambda s: with_sets(s, held + more))

    def _add(self) -> None:
        self.asked.emit("Add a conductor in", self._with_one_more)

    def _with_one_more(self, section: Section) -> Section:
        """With the next usual label, of the circuit that is carried already."""
        held = slots(section)
        taken = {slot.name.partition(".")[0] for slot in held}
        label = next((label for label in _LABELS if label not in taken), "N")
        carried = tuple(load.circuit for slot in held for load in slot.loads)
        circuits = carried or self._circuits
        if not circuits:
            raise UserError("There is no circuit yet: enter one under Circuits.")
        return with_conductor(section, label, circuits[0])

    def _remove(self) -> None:
        names = self._names
        if names:
            few = len(names) <= _MOST
            which = ", ".join(names) if few else f"{len(names)} conductors"
            self.asked.emit(f"Remove {which} from", lambda s: without(s, names))
