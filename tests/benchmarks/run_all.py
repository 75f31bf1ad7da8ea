"""Prints one table after the other: kernel, scaling, maps, whole commands, desktop.

Run on a quiet machine: ``python tests/benchmarks/run_all.py [PART ...]``, with parts
of `kernel`, `scaling`, `maps`, `commands`, `site`, `desktop`; all of them without.

The arithmetic limit is counted so. A segment and a point take 48 additions and
multiplications, one square root and one division (`field.kernel`). The limit is the
rate at which a compiled loop over a tile that stays in the first-level cache does
just one square root and one division of doubles for each pair: on x86-64 these two
share one unit and bound the kernel from above, whatever the rest costs.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tempfile
import time
from collections.abc import Callable
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parents[2]))

import numpy as np
from numba import njit

from engine.adaptive_maps import adaptive_layer
from engine.case_fields import CaseFields, case_currents
from engine.conductor import Conductor
from engine.conductors import conductors
from engine.currents import case_phasors
from engine.field import flux_density
from engine.field.kernel import TILE
from engine.layout_file import read
from engine.maps import extent
from engine.masks import keepouts
from engine.runs import Round
from engine.sampling import horizontal, on_plane
from engine.zone_assessment import zone_floor

HERE = Path(__file__).parent
SAMPLES = sorted((HERE.parents[1] / "sample_layouts").glob("*.json"))


def shortest(work: Callable[[], object], rounds: int = 3) -> float:
    """[s]"""
    times = []
    for _ in range(rounds):
        start = time.perf_counter()
        work()
        times.append(time.perf_counter() - start)
    return min(times)


@njit(error_model="numpy")
def root_and_division(values: np.ndarray, rounds: int) -> None:
    for _ in range(rounds):
        for i in range(TILE):
            values[i] = 1.0 + 1.0 / np.sqrt(values[i])


def kernel() -> None:
    subprocess.run([sys.executable, str(HERE / "kernel_rate.py")], check=True)
    values, rounds = np.ones(TILE), 200_000
    root_and_division(values, 1)
    rate = rounds * TILE / shortest(lambda: root_and_division(values, rounds))
    print(f"limit: one root, one division {rate / 1e6:8.1f} million pairs/s")


def polylines(count: int, rng: np.random.Generator) -> list[Conductor]:
    """Closed routes of 8 segments in a room. [m]"""
    axes = np.tile(np.eye(3)[:2], (9, 1, 1))
    made = []
    for k in range(count):
        path = rng.uniform(-5, 5, (8, 3))
        path = np.concatenate([path, path[:1]])
        shape = Round(diameter=1e-4)
        made.append(
            Conductor(f"{k}", f"{k}", "c", "run", path, axes, shape, (), f"{k}")
        )
    return made


def scaling() -> None:
    """Million pairs a second of `flux_density`, all steps."""
    rng = np.random.default_rng(1)
    print("conductors   points  components  threads   ms   million pairs/s")
    usual = set(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else {0}
    wanted = [(40, n, 1, len(usual)) for n in (1024, 8192, 65536)]
    wanted += [(m, 8192, 1, len(usual)) for m in (10, 160, 640)]
    wanted += [(40, 65536, c, len(usual)) for c in (2, 4, 8)]
    wanted += [(40, 65536, 1, t) for t in range(1, len(usual) + 1)]
    for m, n, c, threads in wanted:
        parts, points = polylines(m, rng), rng.uniform(-5, 5, (n, 3))
        currents = np.ones((c, m), complex)
        if hasattr(os, "sched_setaffinity"):
            os.sched_setaffinity(0, set(sorted(usual)[:threads]))
        flux_density(parts, currents, points[:10])

        def work(
            parts: list[Conductor] = parts,
            currents: np.ndarray = currents,
            points: np.ndarray = points,
        ) -> None:
            flux_density(parts, currents, points)

        taken = shortest(work)
        rate = 8 * m * n / taken / 1e6
        print(
            f"{m:10d} {n:8d} {c:11d} {threads:8d} {1e3 * taken:6.0f} {rate:10.1f}",
            flush=True,
        )
    if hasattr(os, "sched_setaffinity"):
        os.sched_setaffinity(0, usual)


def maps() -> None:
    """Evaluations beside pixels of a picture of 1000 by 800, 1 m above a floor."""
    print("sample                          pixels  evaluations   fewer    s")
    for path in SAMPLES:
        layout = read(path)
        case, parts = layout.cases[0], conductors(layout)
        currents = case_currents(
            case_phasors(layout, case), parts, keepouts(layout, case)
        )
        floors = [zone_floor(layout, zone) for zone in layout.zones]
        z = 1.0 + next(floor for floor in floors if floor is not None)
        x0, y0, x1, y1 = extent(layout)
        step = max((x1 - x0) / 999, (y1 - y0) / 799)
        sample = on_plane(horizontal((x0, x1), (y0, y1), z), step)
        start = time.perf_counter()
        found = adaptive_layer(CaseFields(parts, (currents,)), sample)
        taken = time.perf_counter() - start
        count = len(sample.points)
        print(
            f"{path.stem:30s} {count:8d} {found.evaluations:12d} "
            f"{count / found.evaluations:7.1f} {taken:5.2f}",
            flush=True,
        )


#: Runs a command of the program and prints its peak memory as the system counts it.
_MEASURED = """
import resource, subprocess, sys, time
start = time.perf_counter()
done = subprocess.run(sys.argv[1:], capture_output=True, text=True)
taken = time.perf_counter() - start
peak = resource.getrusage(resource.RUSAGE_CHILDREN).ru_maxrss
peak /= 2**20 if sys.platform == "darwin" else 2**10
print(f"{taken:8.2f} {peak:10.0f} {done.returncode:6d}", flush=True)
"""


def commands() -> None:
    """Whole commands in a new process each."""
    print("sample                         command       s   peak MiB   exit")
    with tempfile.TemporaryDirectory() as folder:
        for path in SAMPLES:
            case = read(path).cases[0].id
            for words in (
                ["assess", str(path)],
                ["map", str(path), f"{folder}/map.png", "--height", "1.0",
                 "--case", case],
                ["report", str(path), f"{folder}/report.pdf"],
            ):  # fmt: skip
                print(f"{path.stem:30s} {words[0]:9s}", end="", flush=True)
                whole = [sys.executable, "-m", "engine", *words]
                subprocess.run(
                    [sys.executable, "-c", _MEASURED, *whole],
                    check=True,
                    cwd=HERE.parents[1],
                )


def site() -> None:
    subprocess.run([sys.executable, str(HERE / "large_site.py")], check=True)


def desktop() -> None:
    subprocess.run([sys.executable, str(HERE / "desktop_latency.py")], check=True)


PARTS = {
    "kernel": kernel,
    "scaling": scaling,
    "maps": maps,
    "commands": commands,
    "site": site,
    "desktop": desktop,
}


def main() -> None:
    wanted = sys.argv[1:] or list(PARTS)
    unknown = [name for name in wanted if name not in PARTS]
    if unknown:
        raise SystemExit(f"No part {', '.join(unknown)}: choose of {', '.join(PARTS)}.")
    for name in wanted:
        print(f"\n{name}", flush=True)
        PARTS[name]()


if __name__ == "__main__":
    main()
