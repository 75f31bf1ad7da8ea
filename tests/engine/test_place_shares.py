"""Shares and retraced rows on the samples: they sum to the value, whatever the case."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace

from engine.circuits import Circuit, ConductorCurrent, DirectCurrents
from engine.contributions import net_current_effect
from engine.equipment import ConductorLoop
from engine.layout import Layout
from engine.layout_file import read
from engine.loaded_layout import loaded_layout
from engine.place_shares import place_shares
from engine.retrace import csv_text, retrace, text_table
from engine.runs import FreeSection, Run, Slot, SlotLoad

SAMPLES = sorted((Path(__file__).parents[2] / "sample_layouts").glob("*.json"))


def each_place(path):
    layout = read(path)
    found = loaded_layout(layout, layout.cases, None, None)
    for case in found.fields.cases:
        for receptor in layout.receptors:
            for kind in ("AC", "DC"):
                if any((f == 0) == (kind == "DC") for f in case.frequencies):
                    yield layout, found.fields, case, receptor.at, kind


@pytest.mark.parametrize("path", SAMPLES, ids=lambda path: path.stem)
def test_shares_of_closed_circuits_sum_to_the_value(path):
    for layout, fields, case, at, kind in each_place(path):
        parts = place_shares(layout, fields, case, at, kind)
        assert not parts.unclosed
        assert sum(p.share for p in parts.shares) == pytest.approx(parts.total)
        assert parts.shown >= parts.total * (1 - 1e-12)
        assert parts.is_bound or parts.shown == pytest.approx(parts.total)
        for part in parts.shares:
            assert part.acts == ("adds" if part.share >= 0 else "cancels")
            # |B − b|² = |B|² − 2 b·B + |b|²
            squared = parts.total**2 - 2 * part.share * parts.total + part.alone**2
            assert part.without**2 == pytest.approx(squared, abs=1e-9 * parts.total**2)
        frequencies = {f.frequency for p in parts.shares for f in p.by_frequency}
        squares = [
            sum(
                f.share
                for p in parts.shares
                for f in p.by_frequency
                if f.frequency == frequency
            )
            ** 2
            for frequency in frequencies
        ]
        assert np.sqrt(sum(squares)) == pytest.approx(parts.total)


@pytest.mark.parametrize("path", SAMPLES, ids=lambda path: path.stem)
def test_retraced_rows_sum_to_the_value_and_to_its_phasors(path):
    for _, fields, case, at, kind in each_place(path):
        found = retrace(fields, case, at, kind)
        assert sum(row.share for row in found.rows) == pytest.approx(found.total)
        whole = fields.flux_density_at(case, np.array([at]))[:, 0]
        for k, component in enumerate(case.components):
            if (component.frequency == 0) != (kind == "DC"):
                continue
            summed = np.sum(
                [
                    row.field
                    for row in found.rows
                    if (row.frequency, row.adds_with)
                    == (component.frequency, component.circuit)
                ],
                axis=0,
            )
            np.testing.assert_allclose(
                summed, whole[k], rtol=0, atol=1e-12 * found.total
            )


def square(id, z=0.0, circuit="ring", label="a"):
    path = ((0.0, 0.0, z), (2.0, 0.0, z), (2.0, 2.0, z), (0.0, 2.0, z))
    return ConductorLoop(id=id, path=path, circuit=circuit, label=label)


def ring(id="ring", rms=10.0, angle=0.0, frequency=50.0, label="a"):
    demand = DirectCurrents(
        currents=(ConductorCurrent(label=label, rms=rms, angle=angle),)
    )
    return Circuit(id=id, supply="free", base_frequency=frequency, demand=demand,
                   neutral="none")  # fmt: skip


def loaded(**parts):
    layout = Layout(**parts)
    found = loaded_layout(layout, layout.cases, None, None)
    return layout, found.fields, found.fields.cases[0]


def test_opposed_ring_cancels_and_its_removal_raises_the_value():
    layout, fields, case = loaded(
        circuits=(ring(), ring("back", 4.0, 180.0)),
        equipment=(square("one"), square("two", circuit="back")),
    )
    parts = place_shares(layout, fields, case, (1.0, 1.0, 1.0))
    first, second = parts.shares
    assert (first.circuits, first.acts) == (("ring",), "adds")
    assert (second.circuits, second.acts) == (("back",), "cancels")
    assert second.share / first.share == pytest.approx(-0.4)
    assert second.without / parts.total == pytest.approx(10 / 6)
    assert first.per_ampere == pytest.approx(first.alone / 10)


def test_open_piece_is_named_and_gets_no_share():
    wire = Run(
        id="wire",
        route=((5.0, 0.0, 0.0), (5.0, 3.0, 0.0)),
        section=FreeSection(
            slots=(
                Slot(
                    name="a",
                    u=0,
                    v=0,
                    loads=(SlotLoad(circuit="loose", label="a"),),
                ),
            )
        ),
    )
    layout, fields, case = loaded(
        circuits=(ring(), ring("loose")), equipment=(square("one"),), runs=(wire,)
    )
    parts = place_shares(layout, fields, case, (1.0, 1.0, 1.0))
    assert [part.circuits for part in parts.shares] == [("ring",)]
    (piece,) = parts.unclosed
    assert piece.circuits == ("loose",)
    assert piece.items == ("wire",)
    whole = sum(part.share for part in parts.shares) + parts.unclosed_share
    assert whole == pytest.approx(parts.total)


def test_circuits_that_close_only_together_have_one_share():
    there = Slot(name="a", u=0.0, v=0, loads=(SlotLoad(circuit="ring", label="a"),))
    back = Slot(name="b", u=0.2, v=0, loads=(SlotLoad(circuit="back", label="a"),))
    pair = Run(id="pair", route=((0.0, 0.0, 0.0), (0.0, 3.0, 0.0)),
               section=FreeSection(slots=(there, back)))  # fmt: skip
    layout, fields, case = loaded(
        circuits=(ring(), ring("back", 10.0, 180.0)), runs=(pair,)
    )
    parts = place_shares(layout, fields, case, (1.0, 1.0, 1.0))
    (only,) = parts.shares
    assert sorted(only.circuits) == ["back", "ring"]
    assert only.share == pytest.approx(parts.total)
    assert not parts.unclosed


def test_unknown_angle_shows_more_than_the_shares_and_says_why():
    layout, fields, case = loaded(
        circuits=(ring(), replace(ring("other"), phase_relation="unknown")),
        equipment=(square("one"), square("two", z=0.1, circuit="other")),
    )
    parts = place_shares(layout, fields, case, (1.0, 1.0, 1.0))
    assert parts.is_bound
    assert parts.bound_reason
    assert parts.shown > 1.3 * parts.total
    found = retrace(fields, case, (1.0, 1.0, 1.0))
    assert "The value shown is" in text_table(found)


def test_net_currents_are_ranked_and_the_first_is_the_one_reported():
    layout, fields, case = loaded(
        circuits=(ring(), ring("far")),
        equipment=(square("two", z=-4.0, circuit="far"), square("one")),
    )
    at = (1.0, 1.0, 0.5)
    parts = place_shares(layout, fields, case, at)
    assert [effect.circuit for effect in parts.net_currents] == ["ring", "far"]
    one = net_current_effect(
        layout.circuits, fields.conductors, fields.at(at).responses
    )
    assert one == parts.net_currents[0]
    assert one.per_ampere == pytest.approx(parts.shares[0].alone / 10)


def test_tables_of_a_retrace_end_with_the_sum():
    _, fields, case = loaded(
        circuits=(ring(angle=-30.0), ring("direct", frequency=0.0)),
        equipment=(square("one"), square("two", circuit="direct")),
    )
    found = retrace(fields, case, (1.0, 1.0, 1.0))
    heads, row, end = list(csv.reader(io.StringIO(csv_text(found, unit="nT"))))
    assert heads[-1] == "share [nT]"
    assert row[:6] == ["one/a", "equipment", "50", "yes", "10", "-30"]
    assert float(row[6]) == pytest.approx(np.sqrt(2) - 0.01)
    assert float(end[-1]) == pytest.approx(found.total * 1e9)
    assert float(row[-2]) == pytest.approx(float(end[-1]))
    text = text_table(found)
    assert "10.0 A∠−30°" in text
    assert text.splitlines()[-1].startswith("sum ")
    direct = retrace(fields, case, (1.0, 1.0, 1.0), "DC")
    assert "10.0 A " in text_table(direct)
