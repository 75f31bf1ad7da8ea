"""The three invented rooms written down a second time, for `test_samples.py`.

Nothing here comes from the program: paths and currents are listed as the rooms'
description gives them, so that a slip in a sample file or in the way from a layout to
conductors shows as a difference.
"""

from __future__ import annotations

import cmath
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from itertools import pairwise
from math import radians

Point = tuple[float, float, float]
#: A part of a circuit's conductor: (circuit, label) to share.
Loads = Mapping[tuple[str, str], float]
#: Straight pieces from the smaller to the larger end, and what flows along them.
Pieces = dict[tuple[Point, Point], dict[tuple[str, str], float]]
#: (circuit, label) to frequency [Hz] to RMS phasor [A].
Phasors = dict[tuple[str, str], dict[float, complex]]

POLES = ("L1", "L2", "L3", "N")


def place(point: Iterable[float]) -> Point:
    """The point to a micrometre, without negative zeros."""
    x, y, z = (round(float(value), 6) + 0.0 for value in point)
    return x, y, z


def add_path(pieces: Pieces, path: Sequence[Iterable[float]], loads: Loads) -> None:
    """Add a polyline's legs; legs without a length are left out."""
    for start, end in pairwise(path):
        a, b = place(start), place(end)
        if a == b:
            continue
        sign = 1.0 if a < b else -1.0
        piece = pieces.setdefault((min(a, b), max(a, b)), defaultdict(float))
        for key, share in loads.items():
            piece[key] += sign * share


def sums(circuits: Sequence[str], label: str, share: float = 1.0) -> Loads:
    return {(circuit, label): share for circuit in circuits}


def office_pieces() -> Pieces:
    """Room A, the link's pairs of bars as one path in their middle."""
    pieces: Pieces = {}
    feeders = ("F1", "F2", "F3", "F4", "F5")
    terminals = (1.50, 1.95, 2.40, 2.85)
    bars = (2.10, 2.00, 1.90, 1.60)
    star = (1.00, 2.175, 1.50)
    top = (5.20, 6.25, 9.00)
    ways = {"F1": 5.2, "F2": 4.4, "F3": 3.6, "F4": 2.8, "F5": 6.8}
    for k, label in enumerate(POLES):
        y, x, z = 1.95 + 0.15 * (k - 1), 6.00 - 0.15 * (k - 1), bars[k]
        link = [
            star,
            (1.00, terminals[k], 1.90),
            (1.00, terminals[k], 3.00),
            (1.30, y, 3.00),
            (x, y, 3.00),
            (x, 4.45, 3.00),
            (x, 4.45, z),
            (x, 4.60, z),
        ]
        add_path(pieces, link, sums(feeders, label))
        add_path(pieces, [(x, 4.60, z), (6.8, 4.60, z)], sums(("F5",), label))
        bar_x = [x, 5.2, 4.4, 3.6, 2.8]
        for i in range(4):
            leg = [(bar_x[i], 4.60, z), (bar_x[i + 1], 4.60, z)]
            add_path(pieces, leg, sums(feeders[i:4], label))
        for feeder, way_x in ways.items():
            foot_x = way_x + 0.08 * (k - 1.5)
            dropper = [
                (way_x, 4.60, z),
                (foot_x, 4.75, z),
                (foot_x, 4.75, 0.80),
            ]
            if feeder != "F1":
                dropper.append((way_x, 4.75, 0.80))
            add_path(pieces, dropper, sums((feeder,), label))
    for i in range(8):
        k, x = i % 4, 5.20 + 0.06 * (i - 3.5)
        cable = [
            (5.2 + 0.08 * (k - 1.5), 4.75, 0.80),
            (x, 4.90, 0.50),
            (x, 5.30, 0.50),
            (x, 5.30, 3.20),
            (x, 6.25, 3.20),
            (x, 6.25, 9.00),
            top,
        ]
        add_path(pieces, cable, sums(("F1",), POLES[k], 0.5))
    stray = [
        star,
        (1.00, 2.85, 1.90),
        (0.60, 2.85, 1.90),
        (0.60, 0.40, 3.75),
        (9.80, 0.40, 3.75),
        (9.80, 0.40, 9.00),
        (9.80, 6.25, 9.00),
        top,
    ]
    add_path(pieces, stray, sums(("F1",), "stray"))
    return pieces


def corridor_pieces() -> Pieces:
    """Room B."""
    pieces: Pieces = {}
    for i, label in enumerate(POLES):
        y = -0.3695 + 0.013 * i
        path = [
            (6.6, -0.35, -4.2),
            (6.6, y, -4.2),
            (6.6, y, 12.6),
            (6.6, -0.35, 12.6),
        ]
        add_path(pieces, path, sums(("R1",), label))
    for i in range(12):
        x = 7.5 + 0.054 * (i - 5.5)
        path = [
            (7.5, -0.20, -4.2),
            (x, -0.20, -4.2),
            (x, -0.20, 12.6),
            (7.5, -0.20, 12.6),
        ]
        add_path(pieces, path, sums(("R2",), POLES[i % 4], 1 / 3))
    stray = [
        (7.5, -0.2, -4.2),
        (7.5, -0.2, -4.4),
        (13.5, -0.3, -4.4),
        (13.5, -0.3, 12.8),
        (7.5, -0.2, 12.8),
        (7.5, -0.2, 12.6),
    ]
    add_path(pieces, stray, sums(("R2",), "stray"))
    for label, (x, y) in {
        "L1": (8.00, -0.20),
        "L2": (8.03, -0.20),
        "L3": (8.06, -0.20),
        "N": (6.2, -1.0),
    }.items():
        path = [
            (8.03, -0.20, -4.2),
            (x, y, -4.2),
            (x, y, 12.6),
            (8.03, -0.20, 12.6),
        ]
        add_path(pieces, path, sums(("R3",), label))
    return pieces


def laboratory_pieces() -> Pieces:
    """Room C."""
    pieces: Pieces = {}
    for k in range(3):
        x, y = 3.0 + 0.08 * (2 - k), 0.5 + 0.08 * k
        path = [
            (0.3, 0.58, 2.6),
            (0.3, y, 2.6),
            (x, y, 2.6),
            (x, 1.2, 2.6),
            (x, 1.2, 1.8),
            (3.08, 1.2, 1.8),
        ]
        add_path(pieces, path, sums(("ups-input",), POLES[k]))
    for label, y in zip(POLES, (1.40, 1.48, 1.56, 1.86), strict=True):
        path = [
            (3.4, 1.2, 1.8),
            (3.4, y, 2.6),
            (5.7, y, 2.6),
            (5.7, y, 1.5),
            (5.7, 1.5, 0.6),
        ]
        add_path(pieces, path, sums(("ups-output",), label))
    for y in (4.55, 4.15):
        path = [
            (1.0, y, 2.2),
            (5.0, y, 2.2),
            (5.0, y, 0.4),
            (1.0, y, 0.4),
            (1.0, y, 2.2),
        ]
        add_path(pieces, path, sums(("battery",), "L+", 0.5))
    plus = [(1.0, 4.2, 2.6), (1.0, 1.6, 2.6), (2.6, 1.6, 2.6), (2.6, 1.6, 1.8)]
    minus = [
        (1.0, 4.2, 2.6),
        (1.06, 4.2, 2.6),
        (1.06, 1.66, 2.6),
        (2.6, 1.66, 2.6),
        (2.6, 1.66, 1.8),
        (2.6, 1.6, 1.8),
    ]
    add_path(pieces, plus, sums(("battery",), "L+"))
    add_path(pieces, minus, sums(("battery",), "L-"))
    return pieces


def add_circuit(
    phasors: Phasors,
    circuit: str,
    base: float,
    loads: Sequence[tuple[float, float]],
    percent: Mapping[int, float],
    *,
    offset_of_3rd: float = 0.0,
    stray: float = 0.0,
    neutral: bool = True,
) -> None:
    """Lines `(A, degrees of lag)`, harmonics in percent, N and its stray share."""
    lines = [
        {
            base * order: cmath.rect(
                rms * part / 100,
                radians(
                    order * (voltage - lag) + (offset_of_3rd if order == 3 else 0.0)
                ),
            )
            for order, part in {1: 100.0, **percent}.items()
        }
        for (rms, lag), voltage in zip(loads, (0.0, -120.0, 120.0), strict=True)
    ]
    for label, line in zip(POLES, lines, strict=False):
        phasors[circuit, label] = line
    if neutral:
        closing = {f: -sum(line[f] for line in lines) for f in lines[0]}
        phasors[circuit, "N"] = {f: (1 - stray) * i for f, i in closing.items()}
        phasors[circuit, "stray"] = {f: stray * i for f, i in closing.items()}


def office_phasors() -> Phasors:
    phasors: Phasors = {}
    loads = {
        "F1": [(575, 18), (540, 20), (505, 22)],
        "F2": [(430, 20), (415, 20), (385, 24)],
        "F3": [(340, 22), (325, 21), (330, 23)],
        "F4": [(225, 15), (190, 15), (205, 15)],
        "F5": [(260, 32), (258, 32), (262, 32)],
    }
    third = {"F1": 12.0, "F2": 10.0, "F3": 6.0, "F4": 15.0, "F5": 0.0}
    for feeder, lines in loads.items():
        add_circuit(
            phasors,
            feeder,
            50.0,
            lines,
            {3: third[feeder]},
            offset_of_3rd=180.0,
            stray=0.15 if feeder == "F1" else 0.0,
        )
    return phasors


def corridor_phasors(*, second_bond: bool = True) -> Phasors:
    phasors: Phasors = {}
    add_circuit(
        phasors,
        "R1",
        60.0,
        [(1420, 24), (1360, 26), (1310, 25)],
        {3: 5.0, 5: 3.0, 7: 1.5},
    )
    add_circuit(
        phasors,
        "R2",
        60.0,
        [(690, 22), (655, 23), (720, 21)],
        {3: 4.0, 5: 3.0, 7: 1.5},
        stray=0.35 if second_bond else 0.0,
    )
    add_circuit(
        phasors,
        "R3",
        60.0,
        [(210, 12), (196, 12), (204, 12)],
        {3: 22.0, 5: 10.0, 7: 4.0},
    )
    return phasors


def laboratory_phasors(case: str) -> Phasors:
    """Normal, discharge or recharge; the ripple is taken to swing with the charging."""
    phasors: Phasors = {}
    if case != "discharge":
        add_circuit(
            phasors,
            "ups-input",
            50.0,
            [(455, 18)] * 3,
            {5: 28.0, 7: 11.0, 11: 8.0, 13: 5.0, 17: 3.5, 19: 2.5},
            neutral=False,
        )
    add_circuit(
        phasors,
        "ups-output",
        50.0,
        [(400, 25), (385, 26), (360, 24)],
        {3: 18.0, 5: 8.0, 7: 4.0},
        offset_of_3rd=180.0,
    )
    battery: dict[str, dict[float, complex]] = {
        "normal": {},
        "discharge": {0.0: 653.0},
        "recharge": {0.0: -60.0, 300.0: -3.6},
    }
    phasors["battery", "L+"] = battery[case]
    phasors["battery", "L-"] = {f: -i for f, i in battery[case].items()}
    return phasors
