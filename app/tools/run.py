"""Run: vertices with heights of their own, level legs and risers, ended by Enter."""

from __future__ import annotations

from math import dist
from typing import get_args

from app.tools.drawing_tool import SAME, Choice, Points
from app.tools.tool import Overlay, Point, Pointer
from engine.circuits import Circuit
from engine.edits import added
from engine.new_sources import new_circuit, riser_to, run_height, with_new_run
from engine.runs import RunKind
from engine.shaping import counted

LEVEL, UP, DOWN = "level", "riser up", "riser down"
KINDS: tuple[RunKind, ...] = get_args(RunKind)

#: Choices of the circuit besides those there are.
AS_LAST, A_NEW_ONE = "as the last run", "a new circuit"


class RunTool(Points):
    """Draws runs; the first one makes its circuit."""

    name, key, icon = "Run", "5", "run"

    def choices(self) -> tuple[Choice, ...]:
        return (
            self._choice("kind", KINDS),
            self._choice("next leg", (LEVEL, UP, DOWN)),
            self._choice("circuit", self._circuit_names()),
        )

    @property
    def kind(self) -> RunKind:
        """What is drawn."""
        value = self.choices()[0].value
        return next(kind for kind in KINDS if kind == value)

    @property
    def next_leg(self) -> str:
        """ "level", "riser up" or "riser down"."""
        return self.choices()[1].value

    def heading(self) -> str:
        if self._points:
            return f"z {self._length_text(self._points[-1][2])}"
        if self._typed_z is not None:
            return f"z {self._length_text(self._typed_z)}"
        return f"z {self._length_text(self._height(self._hover or (0.0, 0.0)))}"

    def press(self, pointer: Pointer) -> None:
        if self.next_leg == LEVEL or not self._points or not self._is_foot(pointer):
            super().press(pointer)
            return
        if self._refuses(pointer):
            return
        x, y, z = self._points[-1]
        layout = self._document.committed
        top = riser_to(layout, z, down=self.next_leg == DOWN)
        with self._shown():
            self._add((x, y, top))
            self._chosen["next leg"] = LEVEL
            self._say()

    def rise(self, *, down: bool = False) -> bool:
        """Go from the last vertex to the next floor; False when none is placed."""
        if not self._points:
            return False
        x, y, z = self._points[-1]
        with self._shown():
            self._add((x, y, riser_to(self._document.committed, z, down=down)))
        self._say()
        return True

    def double_click(self, pointer: Pointer) -> None:
        if self.next_leg != LEVEL:
            self.press(pointer)
        else:
            super().double_click(pointer)

    def back(self) -> bool:
        if self.next_leg != LEVEL:
            self.choose("next leg", LEVEL)
            return True
        return super().back()

    def overlay(self) -> Overlay:
        base = super().overlay()
        labels = tuple(
            (point[:2], f"z {self._length_text(point[2])}") for point in self._points
        )
        return Overlay(
            lines=base.lines,
            points=base.points,
            labels=labels,
            dimensions=base.dimensions,
        )

    def _is_foot(self, pointer: Pointer) -> bool:
        """Whether the riser stands at the last vertex."""
        return dist(self._points[-1][:2], pointer.at) <= max(pointer.reach, SAME)

    def _height(self, at: Point) -> float:
        return run_height(self._document.committed, at, self._storey)

    def _finish(self) -> None:
        layout = self._document.committed
        name = self.choices()[2].value
        circuit = next((c for c in layout.circuits if _shown_name(c) == name), None)
        if name == A_NEW_ONE:
            circuit = new_circuit(layout)
            layout = added(layout, circuit)
        after, id = with_new_run(
            layout, self._points, self.kind, circuit.id if circuit else ""
        )
        run = next(run for run in after.runs if run.id == id)
        self._commit(f"Draw {counted((run,))}", after, (id,))
        if name == A_NEW_ONE:
            # What is drawn next most often goes on from here.
            self._chosen["circuit"] = AS_LAST

    def _start_over(self) -> None:
        self._chosen["next leg"] = LEVEL
        super()._start_over()

    def _choice_made(self) -> None:
        self._say()

    def _circuit_names(self) -> tuple[str, ...]:
        names = [_shown_name(one) for one in self._document.committed.circuits]
        # The first run makes the first circuit anyway.
        return (AS_LAST, *names, *((A_NEW_ONE,) if names else ()))

    def _next_hint(self) -> str:
        if self.next_leg != LEVEL:
            way = "up to the floor above" if self.next_leg == UP else "down to a floor"
            if not self._points:
                return f"Click the foot of the riser {way}."
            return f"Click the last vertex again to go {way}, or another foot first."
        if not self._points:
            return "Click the first vertex, or enter it: “to 3.2 -0.35 z 2.6”."
        if len(self._points) == 1:
            return (
                "Click the next vertex or use the entry strip; Esc goes one step back."
            )
        return (
            "Click the next vertex; Enter or a double click ends, Backspace takes the "
            "last one back."
        )

    def _too_few(self) -> str:
        return "A run needs at least two vertices: click the next one."


def _shown_name(circuit: Circuit) -> str:
    if circuit.title == circuit.id:
        return circuit.id
    return f"{circuit.title} ({circuit.id})"
