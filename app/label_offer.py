"""Offers to relabel sections after a circuit got another supply."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

from engine.layout import Layout
from engine.supply_labels import relabelled

if TYPE_CHECKING:
    from app.main_window import MainWindow


class LabelOffer(QObject):
    """Looks at every edit, and offers what follows from another supply."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        self._seen = self._supplies()
        window.document.path_changed.connect(self._on_another)
        window.document.settled.connect(self._on_settled)

    def _supplies(self) -> tuple[str, dict[str, str]]:
        """What variant is shown, and the supplies in it by circuit."""
        document = self._window.document
        variant = "" if document.variant is None else document.variant.id
        return variant, {c.id: c.supply for c in document.committed.circuits}

    def _on_another(self, _path: object) -> None:
        self._seen = self._supplies()

    def _on_settled(self, layout: Layout) -> None:
        before, self._seen = self._seen, self._supplies()
        if before[0] != self._seen[0]:
            return
        for circuit in layout.circuits:
            if before[1].get(circuit.id, circuit.supply) != circuit.supply:
                self._offer(layout, circuit.id)

    def _offer(self, layout: Layout, circuit: str) -> None:
        count = len(relabelled(layout, circuit).runs)
        if not count:
            return
        title = next(c.title for c in layout.circuits if c.id == circuit)
        sections = "1 section" if count == 1 else f"{count} sections"
        self._window.message_bar.offer(
            f"“{title}” has another supply now, but {sections} that it runs in still "
            "have the labels of the one before: in conductors that the supply does not "
            "have, nothing flows.",
            f"Relabel {sections}",
            partial(self._relabel, circuit),
        )

    def _relabel(self, circuit: str) -> None:
        # Of the layout as it is now: much may have changed since the offer.
        document = self._window.document
        found = next((c for c in document.committed.circuits if c.id == circuit), None)
        if found is not None:
            made = relabelled(document.committed, circuit)
            document.edit(f"Relabel the sections of {found.title}", made.layout)
