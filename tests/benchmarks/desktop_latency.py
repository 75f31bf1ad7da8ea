"""Prints how quickly the desktop answers on the sample of an office over a room.

Run it on a quiet machine: ``python tests/benchmarks/desktop_latency.py``. Every line
states wall time and processor time of this process; beside it what is to be reached.
After it comes the table of `many_runs`.
"""

from __future__ import annotations

import os
import statistics
import subprocess
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from pathlib import Path
from tempfile import TemporaryDirectory

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
sys.path.insert(0, str(Path(__file__).parents[2]))

import msgspec
from many_runs import print_many_runs
from PySide6.QtCore import QCoreApplication, Qt
from PySide6.QtWidgets import QApplication

from app.document import Document
from app.field_store import FieldStore
from app.map_picture import MapPicture
from app.map_request import MapRequest, heights_of, map_values
from app.margin_values import Margins
from app.panels.margins import MarginsPanel
from app.readout_values import ReadoutRequest, readout
from app.recompute import Recompute
from app.view_state import Look, ViewState
from engine.circuits import LineLoads
from engine.edits import replaced
from engine.layout import Layout
from engine.layout_file import read

SAMPLE = Path(__file__).parents[2] / "sample_layouts" / "office-over-switch-room.json"
RECT = (-2.0, -1.7, 12.0, 8.3)
PIXELS = (1100, 786)


#: The desktop from its process on, as `python -m app` starts it: prints milliseconds
#: of wall and processor until the window shows, and from there to map and margins.
STARTED = """
import sys, time
begun = time.perf_counter()
from PySide6.QtCore import QCoreApplication, Qt
from PySide6.QtWidgets import QApplication
QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
application = QApplication([])
application.setStyle("Fusion")
from pathlib import Path
from app.collection import Collection
from app.start import started
Collection(application)
window = started(Path(sys.argv[1]))
window.show()
application.processEvents()
up, work = time.perf_counter(), time.process_time()
print(1e3 * (up - begun), 1e3 * work)
window.recompute.wait_until_idle()
print(1e3 * (time.perf_counter() - up), 1e3 * (time.process_time() - work))
window.close()
"""


@dataclass
class Taken:
    """Milliseconds of wall and of processor."""

    wall: float
    work: float


def taken(do: Callable[[], object]) -> Taken:
    wall, work = time.perf_counter(), time.process_time()
    do()
    return Taken(1e3 * (time.perf_counter() - wall), 1e3 * (time.process_time() - work))


def median(parts: list[Taken]) -> Taken:
    return Taken(
        statistics.median(p.wall for p in parts),
        statistics.median(p.work for p in parts),
    )


def line(what: str, found: Taken, wanted: str) -> None:
    print(f"{what:58s} {found.wall:8.1f} {found.work:8.1f}   {wanted}", flush=True)


def starts() -> None:
    """The window up, and then its map and margins; the first of four warms up."""
    ups, fulls = [], []
    with TemporaryDirectory() as home:
        # Work that a crash left behind would be brought back, and asked for at the end.
        own = {"XDG_DATA_HOME": home, "XDG_CONFIG_HOME": home}
        done = [
            subprocess.run(
                [sys.executable, "-c", STARTED, str(SAMPLE)],
                cwd=SAMPLE.parents[1],
                env=os.environ | own,
                stdout=subprocess.PIPE,
                encoding="utf-8",
                check=True,
            )
            for _ in range(4)
        ]
    for each in done:
        up, full = (map(float, row.split()) for row in each.stdout.splitlines()[-2:])
        ups.append(Taken(*up))
        fulls.append(Taken(*full))
    line("start: window up, warm", median(ups[1:]), "< 2500 ms")
    line("start: full map and margins", median(fulls[1:]), "< 1500 ms after that")


class Desk:
    """Document, view and background as the window has them, without the window."""

    def __init__(self) -> None:
        self.document, self.view_state = Document(), ViewState()
        self.recompute = Recompute(self.document, self.view_state)
        self.panel = MarginsPanel(self.document)
        self.maps: list[MapPicture] = []
        self.margins: list[Margins] = []
        self.recompute.map_ready.connect(self.maps.append)
        self.recompute.margins_ready.connect(self.margins.append)
        self.recompute.margins_ready.connect(self.panel.set_margins)

    def until(self, reached: Callable[[], bool]) -> None:
        end = time.monotonic() + 60.0
        while not reached():
            if time.monotonic() > end:
                raise SystemExit("Nothing came for a minute.")
            QCoreApplication.processEvents()
            time.sleep(0.001)

    def forget(self) -> None:
        self.maps.clear()
        self.margins.clear()

    def has_map(self, coarse: bool) -> bool:
        return any(m.is_coarse == coarse and not m.is_stale for m in self.maps)

    def has_exact_margins(self) -> bool:
        return any(not m.is_sampled for m in self.margins)


def shifted(layout: Layout, name: str, by: float) -> Layout:
    run = next(r for r in layout.runs if r.id == name)
    route = tuple((x, y + by, z) for x, y, z in run.route)
    return replaced(layout, msgspec.structs.replace(run, route=route))


def opened(desk: Desk, layout: Layout) -> None:
    def do() -> None:
        desk.document.open(layout, None)
        desk.recompute.set_view(RECT, PIXELS)
        desk.until(lambda: desk.has_map(False) and desk.has_exact_margins())

    line("open: fine map and margins", taken(do), "< 1500 ms after the window")
    desk.recompute.wait_until_idle()


def dragged(desk: Desk, layout: Layout, name: str) -> None:
    """As quickly as maps come, for 50 moves of the pointer."""
    parts = []
    for k in range(50):
        desk.forget()

        def do(k: int = k) -> None:
            desk.document.preview(shifted(layout, name, 0.01 * (k + 1)))
            desk.until(lambda: desk.has_map(True))

        parts.append(taken(do))
        desk.recompute.wait_until_idle()
    line(f"drag {name}: coarse map after a move", median(parts[5:]), "< 40 ms")
    margins = [taken(partial(both, desk, layout, name, k)) for k in range(20)]
    line(f"drag {name}: coarse map and sampled margins", median(margins), "< 40 ms")
    desk.forget()

    def release() -> None:
        desk.document.edit("Move the run", desk.document.layout)
        desk.until(lambda: desk.has_map(False))

    line(f"drag {name}: fine map after release", taken(release), "< 150 ms")
    desk.recompute.wait_until_idle()


def both(desk: Desk, layout: Layout, name: str, k: int) -> None:
    desk.forget()
    desk.document.preview(shifted(layout, name, 0.3 + 0.01 * k))
    desk.until(lambda: desk.has_map(True) and bool(desk.margins))


def looked_at(desk: Desk, layout: Layout) -> None:
    """Another load case, another current."""
    for kind in (True, False):
        parts = []
        for k in range(9):
            desk.forget()

            def do(k: int = k, kind: bool = kind) -> None:
                case = layout.cases[(k + 1) % len(layout.cases)]
                desk.view_state.set(case=case.id)
                desk.until(lambda: desk.has_map(kind))

            parts.append(taken(do))
            desk.recompute.wait_until_idle()
        name = "coarse" if kind else "fine"
        line(f"another load case: {name} picture", median(parts), "< 60 ms")
    desk.view_state.set(case="")
    desk.recompute.wait_until_idle()
    parts = []
    for k in range(9):
        desk.forget()
        changed = with_current(desk.document.layout, 1.0 + 0.01 * (k + 1))

        def edit(changed: Layout = changed) -> None:
            desk.document.edit("Change a current", changed)
            desk.until(lambda: desk.has_map(True))

        parts.append(taken(edit))
        desk.recompute.wait_until_idle()
    line("another current: coarse picture", median(parts), "< 60 ms")


def with_current(layout: Layout, factor: float) -> Layout:
    """The first circuit with another demand."""

    circuit = layout.circuits[0]
    demand = circuit.demand
    assert isinstance(demand, LineLoads), "so is the sample's first circuit"
    loads = tuple(
        msgspec.structs.replace(load, rms=load.rms * factor) for load in demand.loads
    )
    new = msgspec.structs.replace(demand, loads=loads)
    return replaced(layout, msgspec.structs.replace(circuit, demand=new))


def values_alone(layout: Layout) -> None:
    """Field values without thread and picture."""
    store = FieldStore()
    heights, name = heights_of(layout, Look())
    for fineness in ("coarse", "fine"):
        parts = []
        for k in range(9):
            changed = with_current(layout, 1.0 + 0.01 * k)
            request = MapRequest(changed, "", heights, RECT, PIXELS, fineness, name)
            parts.append(taken(partial(map_values, request, store)))
        wanted = "< 16 ms of work" if fineness == "coarse" else ""
        line(f"another current: {fineness} values alone", median(parts[1:]), wanted)
    parts = [
        taken(partial(readout, ReadoutRequest(layout, Look(), 5.0, 0.01 * k)))
        for k in range(20)
    ]
    line("readout at the pointer", median(parts), "")


def main() -> None:
    # Where the display can, the view in space shares what it draws with.
    QCoreApplication.setAttribute(Qt.ApplicationAttribute.AA_ShareOpenGLContexts)
    application = QApplication.instance() or QApplication([])
    layout = read(SAMPLE)
    print(f"{os.cpu_count()} processors; load {os.getloadavg()[0]:.2f}")
    print(f"{'':58s} {'wall ms':>8s} {'work ms':>8s}   to reach")
    starts()
    desk = Desk()
    # The window takes longer than that; the background gets ready meanwhile.
    desk.recompute.wait_until_idle()
    opened(desk, layout)
    for name in ("link-L1", "riser"):
        dragged(desk, desk.document.layout, name)
    looked_at(desk, desk.document.layout)
    values_alone(layout)
    desk.recompute.close()
    application.processEvents()
    print()
    print_many_runs()


if __name__ == "__main__":
    main()
