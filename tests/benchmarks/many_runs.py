"""Prints how fluid the window is with 300 runs of ten conductors each.

Run it on a quiet machine: ``python tests/benchmarks/many_runs.py``; `desktop_latency`
prints the same after its own. Everything goes through the window itself: pointer
events, painting and the background's results in one event loop. "Work" is what the
pointer's thread computes; "wall" also holds what it waited for.
"""

from __future__ import annotations

import gc
import os
import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
sys.path.insert(0, str(Path(__file__).parents[2]))

from PySide6.QtCore import QCoreApplication, QEvent, QPointF, Qt
from PySide6.QtGui import QMouseEvent, QWheelEvent
from PySide6.QtWidgets import QApplication

from app.document import Document
from app.main_window import MainWindow
from app.map_picture import MapPicture
from app.messages import Messages
from engine.circuits import BalancedCurrent, Circuit
from engine.conductors import conductors
from engine.criteria import LevelPoint, LevelTable, ReferenceLevel
from engine.layout import Layout
from engine.places import Zone
from engine.runs import CircuitShare, ParallelSets, Run

#: Trays in one row, and from one to the next. [-], [m]
_ROW, _APART = 20, 2.0

#: A pointer moves so often. [s]
_RATE = 1 / 60


def many_runs(count: int = 300) -> Layout:
    """Trays with ten conductors each and nothing at their ends; one zone above."""
    section = ParallelSets(
        circuits=(CircuitShare(circuit="C"),),
        orders=(("L1", "L2", "L3", "N"), ("N", "L3", "L2", "L1"), ("L1", "L2")),
        pitch=0.03,
        set_pitch=0.13,
    )
    runs = []
    for i in range(count):
        x, y = _APART * (i % _ROW), _APART * (i // _ROW)
        route = ((x, y, 2.5), (x + 1.2, y, 2.5), (x + 1.2, y + 1.2, 2.5))
        runs.append(Run(id=f"r{i}", kind="cable ladder", route=route, section=section))
    zone = Zone(
        id="above",
        outline=((0.0, 0.0), (40.0, 0.0), (40.0, 30.0), (0.0, 30.0)),
        floor_level=4.0,
        heights=(0.5, 1.0, 1.5),
        levels=("target",),
    )
    level = ReferenceLevel(
        id="target",
        name="Target",
        source="agreed for this layout",
        edition="1",
        category="equipment",
        entered_by="benchmark",
        values=LevelTable(points=(LevelPoint(frequency=50.0, level=1e-6),)),
    )
    circuit = Circuit(id="C", demand=BalancedCurrent(rms=100.0))
    return Layout(circuits=(circuit,), runs=tuple(runs), zones=(zone,), levels=(level,))


class Bench:
    """A window with a layout, and a pointer in it."""

    def __init__(self, layout: Layout) -> None:
        self.window = MainWindow(Document(layout), Messages())
        self.window.resize(1360, 860)
        self.window.show()
        self.view = self.window.drawings.plan
        self.view.catches_places = False
        self.maps: list[tuple[float, MapPicture]] = []
        self.window.recompute.map_ready.connect(
            lambda picture: self.maps.append((time.perf_counter(), picture))
        )
        self.rest()
        self.view.fit()
        self.rest()

    def rest(self) -> None:
        """Let everything be computed and painted."""
        for _ in range(3):
            QCoreApplication.processEvents()
            if not self.window.recompute.wait_until_idle(300.0):
                raise SystemExit("The background has not come to rest in 300 s.")

    def pointer(
        self, kind: QEvent.Type, at: QPointF, button: Qt.MouseButton, held: bool
    ) -> None:
        viewport = self.view.viewport()
        QCoreApplication.sendEvent(
            viewport,
            QMouseEvent(
                kind,
                at,
                QPointF(viewport.mapToGlobal(at)),
                button,
                button if held else Qt.MouseButton.NoButton,
                Qt.KeyboardModifier.NoModifier,
            ),
        )

    def wheel(self, at: QPointF, steps: float) -> None:
        viewport = self.view.viewport()
        QCoreApplication.sendEvent(
            viewport,
            QWheelEvent(
                at,
                QPointF(viewport.mapToGlobal(at)),
                QPointF(0.0, 0.0).toPoint(),
                QPointF(0.0, 120.0 * steps).toPoint(),
                Qt.MouseButton.NoButton,
                Qt.KeyboardModifier.NoModifier,
                Qt.ScrollPhase.NoScrollPhase,
                False,
            ),
        )

    def timed(self, what: str, act: Callable[[int], object], count: int = 40) -> None:
        """Do something at the rate of a pointer; every step until it is painted."""
        walls, works = [], []
        for k in range(count):
            wall, work = time.perf_counter(), time.thread_time()
            act(k)
            QCoreApplication.processEvents()
            walls.append(1e3 * (time.perf_counter() - wall))
            works.append(1e3 * (time.thread_time() - work))
            time.sleep(max(0.0, _RATE - 1e-3 * walls[-1]))
        ordered = sorted(walls[2:])
        print(
            f"{what:40s} {statistics.median(ordered):8.1f} "
            f"{ordered[int(0.9 * len(ordered))]:8.1f} {statistics.median(works):8.1f}"
            "   < 40 ms",
            flush=True,
        )

    def pan(self) -> None:
        middle = QPointF(400.0, 300.0)
        right = Qt.MouseButton.RightButton
        self.pointer(QEvent.Type.MouseButtonPress, middle, right, True)

        def act(k: int) -> None:
            at = middle + QPointF(2.0 * k, 1.0 * k)
            self.pointer(QEvent.Type.MouseMove, at, right, True)

        self.timed("pan", act)
        self.pointer(QEvent.Type.MouseButtonRelease, middle, right, False)
        self.rest()

    def zoom(self) -> None:
        at = QPointF(400.0, 300.0)
        self.timed(
            "zoom by the wheel", lambda k: self.wheel(at, 1 if k % 8 < 4 else -1)
        )
        self.rest()

    def select(self) -> None:
        document = self.window.document
        self.timed("select", lambda k: document.select([f"r{7 * k % 300}"]))
        document.select([])
        self.rest()

    def drag(self) -> None:
        """Take a run in the middle and move it about, with its map."""
        run = self.window.document.layout.runs[150]
        x, y, _ = run.route[0]
        start = self.view.camera().pixel((x + 0.6, y))
        left = Qt.MouseButton.LeftButton
        self.pointer(QEvent.Type.MouseButtonPress, start, left, True)
        QCoreApplication.processEvents()
        # As `app.collection` has it while a button is held.
        gc.disable()
        self.maps.clear()
        began = time.perf_counter()

        def act(k: int) -> None:
            at = start + QPointF(8.0 + 1.5 * k, 1.0 * (k % 20))
            self.pointer(QEvent.Type.MouseMove, at, left, True)

        self.timed("drag a run with its map: step", act, 90)
        took = time.perf_counter() - began
        if not self.window.document.is_previewing:
            raise SystemExit("The pointer has not taken the run.")
        coarse = sum(p.is_coarse and not p.is_stale for _, p in self.maps)
        stale = sum(p.is_stale for _, p in self.maps)
        print(f"{'  steps a second':40s} {90 / took:8.1f}{'':20s}> 25")
        print(f"{'  coarse maps a second':40s} {coarse / took:8.1f}{'':20s}several")
        print(f"{'  times out of date':40s} {stale:8d}{'':20s}0")
        self.maps.clear()
        gc.enable()
        end = start + QPointF(30.0, 10.0)
        wall = time.perf_counter()
        self.pointer(QEvent.Type.MouseButtonRelease, end, left, False)
        while not any(not p.is_coarse for _, p in self.maps):
            QCoreApplication.processEvents()
            time.sleep(0.001)
        print(
            f"{'  fine map after release':40s} {1e3 * (self.maps[-1][0] - wall):8.1f}"
        )
        self.rest()


def print_many_runs() -> None:
    """One table; "90 %" is what nine of ten steps are done within."""
    layout = many_runs()
    parts = conductors(layout)
    print(
        f"{len(layout.runs)} runs, {sum(c.role == 'run' for c in parts)} conductors, "
        f"{len(parts)} with assumed links; load {os.getloadavg()[0]:.2f}"
    )
    print(f"{'':40s} {'wall ms':>8s} {'90 %':>8s} {'work ms':>8s}   to reach")
    bench = Bench(layout)
    bench.pan()
    bench.zoom()
    bench.select()
    bench.drag()
    bench.window.document.undo_stack.setClean()
    bench.window.close()


def main() -> None:
    QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
    application = QApplication.instance() or QApplication([])
    print_many_runs()
    application.processEvents()


if __name__ == "__main__":
    main()
