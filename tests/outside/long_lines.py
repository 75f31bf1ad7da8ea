"""Layouts whose field is known in closed form: long straight lines along y."""

from __future__ import annotations

from engine.circuits import (
    BalancedCurrent,
    Circuit,
    ConductorCurrent,
    DirectCurrents,
)
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.layout import Layout
from engine.loaded_layout import LoadedLayout, loaded_layout
from engine.runs import CircuitShare, Flat, Round, Run, Trefoil

#: Longest coordinate of a layout: stands in for an infinite line. [m]
FAR = 1e5
THIN = Round(diameter=0.004)


def three_phase(id="three-phase", rms=100.0, **fields):
    return Circuit(
        id=id, supply="three-phase three-wire", neutral="none",
        demand=BalancedCurrent(rms=rms), **fields,
    )  # fmt: skip


def direct(id, frequency=50.0, **currents):
    made = tuple(ConductorCurrent(label=k, rms=abs(v), angle=0 if v >= 0 else 180)
                 for k, v in currents.items())  # fmt: skip
    return Circuit(
        id=id, supply="free", base_frequency=frequency, neutral="none",
        demand=DirectCurrents(currents=made),
    )  # fmt: skip


def flat(circuit, order=("L1", "L2", "L3"), pitch=0.1, x=0.0, z=0.0, id="line"):
    section = Flat(
        circuits=(CircuitShare(circuit=circuit),), order=order, pitch=pitch, shape=THIN
    )
    return Run(id=id, route=((x, -FAR, z), (x, FAR, z)), section=section)


def trefoil(circuit, pitch=0.1, id="line"):
    section = Trefoil(circuits=(CircuitShare(circuit=circuit),), pitch=pitch,
                      shape=THIN)  # fmt: skip
    return Run(id=id, route=((0.0, -FAR, 0.0), (0.0, FAR, 0.0)), section=section)


def level(tesla, id="target", **fields):
    """A flat level from 1 Hz to 10 kHz, of nobody's making."""
    values = LevelRanges(ranges=(LevelRange(f_from=1, f_to=1e4, coefficient=tesla),))
    return ReferenceLevel(
        id=id, name="Target", source="Invented for a test", values=values,
        category="general public, long stay", **fields,
    )  # fmt: skip


def loaded(circuits, runs, cases=None, **fields) -> LoadedLayout:
    layout = Layout(circuits=tuple(circuits), runs=tuple(runs), **fields)
    return loaded_layout(layout, cases or layout.cases, None, None)
