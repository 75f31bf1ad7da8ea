"""Profiles: sampling, extrema, masks, tables, fall-off and hand formulas refused."""

from __future__ import annotations

import csv
import io
import math
from pathlib import Path

import numpy as np
import pytest

from engine.circuits import (
    Circuit,
    CircuitFactor,
    ConductorCurrent,
    DirectCurrents,
    LoadCase,
)
from engine.criteria import LevelRange, LevelRanges, ReferenceLevel
from engine.distance_to_level import (
    edge_of,
    largest_distance,
    lines_on_plan,
    load_factor,
    side_of,
)
from engine.equipment import ConductorLoop
from engine.errors import UserError
from engine.fall_off import NoFallOff, distances_from_nearest, fall_off
from engine.hand_formulas import NoHandFormula, hand_formulas
from engine.layout import Layout
from engine.layout_file import read
from engine.loaded_layout import loaded_layout
from engine.places import Enclosure
from engine.profile_table import csv_text, profile_table
from engine.profiles import profile
from engine.runs import FreeSection, Round, Run, Slot, SlotLoad
from engine.sampling import area_of

SAMPLES = Path(__file__).parents[2] / "sample_layouts"
FAR = 5000.0


def circuit(id="c", rms=100.0, frequency=50.0):
    demand = DirectCurrents(currents=(ConductorCurrent(label="a", rms=rms),))
    return Circuit(id=id, supply="free", base_frequency=frequency, demand=demand,
                   neutral="none")  # fmt: skip


def wire(id="wire", circuit="c", y=0.0, z=0.0):
    """Along x; its return lies 5 km below: 0.1 % within 5 m."""
    path = ((-FAR, y, z), (FAR, y, z), (FAR, y, z - FAR), (-FAR, y, z - FAR))
    return ConductorLoop(id=id, path=path, circuit=circuit, label="a",
                         shape=Round(diameter=0.02))  # fmt: skip


def loaded(layout, cases=None):
    return loaded_layout(layout, cases or layout.cases, None, None)


def target(tesla, f_from=1.0, f_to=1e4):
    values = LevelRanges(
        ranges=(LevelRange(f_from=f_from, f_to=f_to, coefficient=tesla),)
    )
    return ReferenceLevel(id="target", name="Target", source="Invented for a test",
                          category="workers", values=values)  # fmt: skip


ACROSS = ((0.0, -3.0, 0.0), (0.0, 3.0, 0.0))


def test_profile_over_a_wire_is_amperes_law_with_its_crest_over_the_wire():
    found = profile(loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields,
                    ACROSS, heights=(0.5, 1.0))  # fmt: skip
    assert [curve.height for curve in found.curves] == [0.5, 1.0]
    for curve in found.curves:
        law = 2e-7 * 100 / np.hypot(found.along - 3, curve.height)
        # The return, 5 km below.
        np.testing.assert_allclose(curve.ac, law, rtol=1e-3)
    for extremum in found.extrema:
        assert extremum.along == pytest.approx(3.0, abs=0.02)
        assert extremum.is_largest
    assert len(found.extrema) == 2


def test_straight_lines_between_samples_show_the_curve():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    found = profile(fields, ACROSS, heights=(0.05,))
    curve = found.curves[0]
    middles = (found.along[1:] + found.along[:-1]) / 2
    law = 2e-7 * 100 / np.hypot(middles - 3, 0.05)
    drawn = np.interp(middles, found.along, curve.ac)
    np.testing.assert_allclose(drawn, law, rtol=0.006)
    assert len(found.along) < 1000


def test_profile_through_a_conductor_is_masked_to_a_millimetre_of_its_surface():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    found = profile(fields, ACROSS, levels=(target(1e-6),))
    curve = found.curves[0]
    inside = np.abs(found.along - 3) < 0.01
    assert np.array_equal(curve.mask, inside)
    free = found.along[~curve.mask]
    assert np.min(np.abs(free - 3)) < 0.01 + 2e-3
    assert not curve.ac[curve.mask].any()
    # Falls through 1 µT nowhere within 3 m; the mask is no crossing.
    assert not found.crossings


def test_crossings_rise_towards_the_wire_and_fall_behind_it():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    found = profile(fields, ACROSS, heights=(0.5,), levels=(target(20e-6),))
    first, second = found.crossings
    # 20 µT of 100 A at 1 m; the return takes 0.03 % off.
    half = math.sqrt(1 - 0.25)
    assert (first.rising, second.rising) == (True, False)
    assert first.along == pytest.approx(3 - half, abs=1e-3)
    assert second.along == pytest.approx(3 + half, abs=1e-3)
    assert second.at == pytest.approx((0.0, half, 0.5), abs=1e-3)


def test_cases_and_kinds_stand_apart_in_one_table():
    layout = Layout(
        circuits=(circuit(), circuit("d", 50.0, 0.0)),
        equipment=(wire(), wire("dc", "d", z=-1.0)),
    )
    half = LoadCase(
        id="half", name="Half", factors=(CircuitFactor(circuit="c", factor=0.5),),
        others="off",
    )  # fmt: skip
    cases = (layout.cases[0], half)
    found = profile(loaded(layout, cases).fields, ACROSS, heights=(1.0,),
                    levels=(target(20e-6),))  # fmt: skip
    whole, less = found.curves
    np.testing.assert_allclose(less.ac, whole.ac / 2, rtol=1e-9)
    assert less.dc is None
    assert whole.dc is not None
    (of_level,) = less.levels
    assert of_level.kind == "AC"
    direct = next(c for c in whole.levels if c.kind == "DC")
    assert direct.ratios is None
    assert "0 Hz" in direct.reason
    table = profile_table(found, {"half": "Half load"}, unit="nT", length_unit="mm")
    rows = list(csv.reader(io.StringIO(csv_text(table))))
    assert rows[0] == list(table.heads)
    assert "B AC, Half load, z 1000 mm [nT]" in rows[0]
    assert len(rows) == len(found.along) + 1
    column = rows[0].index("B AC, Half load, z 1000 mm [nT]")
    assert float(rows[1][column]) == pytest.approx(less.ac[0] * 1e9)
    assert float(rows[1][0]) == 0.0


def test_closed_enclosure_leaves_cells_empty():
    board = Enclosure(id="e", footprint=((-1, 1), (1, 1), (1, 2), (-1, 2)),
                      z_from=-1, z_to=1)  # fmt: skip
    layout = Layout(circuits=(circuit(),), equipment=(wire(),), enclosures=(board,))
    found = profile(loaded(layout).fields, ACROSS)
    table = profile_table(found, {})
    column = next(k for k, head in enumerate(table.heads) if head.startswith("B AC"))
    hidden = [row[0] for row in table.rows if row[column] is None]
    behind = [s for s in hidden if s > 3.5]
    assert 4 <= min(behind) < 4.003
    assert 4.997 < max(behind) <= 5
    # Where the line keeps its own heights, z has a column.
    assert table.heads[3] == "z [m]"


def test_line_without_length_is_refused():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    with pytest.raises(UserError, match=r"stands upright .* plot it at its own"):
        profile(fields, ((0, 0, 0), (0, 0, 2.0)), heights=(1.0,))
    for path in (((1, 1, 1), (1, 1, 1)), ((1, 1, 1), (1 + 1e-9, 1, 1), (1, 1, 1))):
        for heights in ((), (1.0,)):
            with pytest.raises(UserError, match=r"The line has no length: .*Draw it"):
                profile(fields, path, heights=heights)


def test_repeated_vertices_and_rises_change_nothing():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    plain = profile(fields, ((0, 1, 1), (2, 1, 1), (2, 3, 1)))
    twice = ((0, 1, 1), (0, 1, 1), (2, 1, 1), (2, 1, 1), (2, 3, 1), (2, 3, 1))
    again = profile(fields, twice)
    assert np.array_equal(again.along, plain.along)
    assert np.array_equal(again.curves[0].ac, plain.curves[0].ac)
    # At one height an upright leg has no length of its own.
    risen = profile(
        fields, ((0, 1, 1), (2, 1, 1), (2, 1, 5), (2, 3, 5)), heights=(1.0,)
    )
    assert np.array_equal(risen.curves[0].ac, plain.curves[0].ac)


def test_fall_off_refuses_a_rising_field_and_a_short_way():
    # Opposed wires on both sides of the line: the field between them has a dip.
    layout = Layout(circuits=(circuit(), circuit("e")),
                    equipment=(wire(), wire("other", "e", y=8.0)))  # fmt: skip
    fields = loaded(layout).fields
    found = profile(fields, ((0.0, 1.0, 0.0), (0.0, 7.5, 0.0)))
    curve = found.curves[0]
    r = np.abs(curve.points[:, 1])
    refused = fall_off(curve, "AC", r, "wire")
    assert isinstance(refused, NoFallOff)
    assert "does not fall all the way" in refused.sentence()
    assert refused.sentence("ft").endswith(" ft from wire.")
    short = profile(fields, ((0.0, 1.0, 0.0), (0.0, 1.2, 0.0)))
    r = distances_from_nearest(fields.conductors, short.curves[0].points)
    assert r == pytest.approx(short.along + 1.0)
    assert isinstance(fall_off(short.curves[0], "AC", r, "wire"), NoFallOff)
    assert isinstance(fall_off(short.curves[0], "DC", r, "wire"), NoFallOff)


def test_fall_off_of_an_unclear_power_lies_between():
    # A net current of a tenth beside a pair: from 1/r² far in to 1/r far out.
    slots = (
        Slot(name="a", u=-0.5, v=0, loads=(SlotLoad(circuit="c", label="a"),)),
        Slot(name="b", u=0.5, v=0,
             loads=(SlotLoad(circuit="c", label="a", share=-0.9),)),
    )  # fmt: skip
    run = Run(id="r", route=((-FAR, 0, 0), (FAR, 0, 0)),
              section=FreeSection(slots=slots))  # fmt: skip
    fields = loaded(Layout(circuits=(circuit(),), runs=(run,))).fields
    found = profile(fields, ((0.0, 2.0, 0.0), (0.0, 20.0, 0.0)))
    law = fall_off(found.curves[0], "AC", 2.0 + found.along, "run")
    assert not isinstance(law, NoFallOff)
    assert law.name == "between 1/r and 1/r²"
    assert (law.r_from, law.r_to) == pytest.approx((5.0, 20.0))
    assert "from 5.00 to 20.0 m from run" in law.sentence()


def test_hand_formula_says_why_none_holds():
    pair = Run(
        id="pair", route=((0.0, 0.0, 0.0), (10.0, 0.0, 0.0)),
        section=FreeSection(slots=(
            Slot(name="a", u=-0.05, v=0, loads=(SlotLoad(circuit="c", label="a"),)),
            Slot(name="b", u=0.05, v=0,
                 loads=(SlotLoad(circuit="c", label="a", share=-1),)),
        )),
    )  # fmt: skip
    fields = loaded(Layout(circuits=(circuit(),), runs=(pair,))).fields

    def reason(at):
        (found,) = hand_formulas(fields, fields.cases[0], at)
        assert isinstance(found, NoHandFormula)
        return found.reason

    assert "5 spacings" in reason((5.0, 0.3, 0.0))
    assert "straight for 4 distances (8.00 m)" in reason((5.0, 0.0, 2.0))


def test_hand_formula_stays_silent_beside_a_stronger_source():
    layout = read(SAMPLES / "imaging-corridor.json")
    fields = loaded(layout).fields
    found = hand_formulas(fields, fields.cases[0], layout.receptors[0].at)
    assert found
    assert all(isinstance(one, NoHandFormula) for one in found)


def test_largest_distance_from_an_edge_and_beyond_a_wall():
    # 20 µT of 100 A at 1 m, the wire 0.3 m inside the wall at y = 0.3.
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    case, level = fields.cases[0], target(20e-6)
    lines = lines_on_plan(fields, case, level, (0.0,), (-2, -2, 2, 2))
    assert lines.is_cut
    room = ((-5.0, -3.0), (5.0, -3.0), (5.0, 0.3), (-5.0, 0.3))
    far = largest_distance(fields, case, level, lines, side_of(room, 2), "wall",
                           beyond=area_of(room))  # fmt: skip
    assert far is not None
    assert far.distance == pytest.approx(0.7, abs=2e-3)
    assert far.start[1] == pytest.approx(0.3)
    assert far.end[1] == pytest.approx(1.0, abs=2e-3)
    assert far.sentence.startswith("at least 0.7")
    edge = largest_distance(fields, case, level, lines, edge_of(room), "edge")
    assert edge is not None
    assert edge.distance == pytest.approx(1.3, abs=2e-3)


def test_level_that_is_nowhere_reached_says_on_which_side_all_lies():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    case, area = fields.cases[0], (-2, -2, 2, 2)
    low = lines_on_plan(fields, case, target(1e-3), (1.0,), area)
    high = lines_on_plan(fields, case, target(1e-6), (1.0,), area)
    assert (low.lines, low.everywhere) == ((), "below")
    assert (high.lines, high.everywhere) == ((), "above")
    assert largest_distance(fields, case, target(1e-3), low, edge_of(((0, 0), (1, 0),
                            (1, 1))), "edge") is None  # fmt: skip


def test_small_line_around_a_conductor_is_found_on_a_large_plan():
    # 1 mT of 100 A: 2 cm around an upright wire, on 20 m.
    upright = Run(
        id="up", route=((3.03, 2.01, -FAR), (3.03, 2.01, FAR)),
        section=FreeSection(slots=(
            Slot(name="a", u=0, v=0, shape=Round(diameter=0.004),
                 loads=(SlotLoad(circuit="c", label="a"),)),
        )),
    )  # fmt: skip
    fields = loaded(Layout(circuits=(circuit(),), runs=(upright,))).fields
    lines = lines_on_plan(fields, fields.cases[0], target(1e-3), (0.0,), (-10, -10,
                          10, 10))  # fmt: skip
    (ring,) = lines.lines
    apart = np.linalg.norm(ring - [3.03, 2.01], axis=1)
    assert apart == pytest.approx(0.02, abs=1e-3)
    assert not lines.is_cut


def test_level_without_a_value_for_a_current_is_told():
    fields = loaded(Layout(circuits=(circuit(),), equipment=(wire(),))).fields
    with pytest.raises(UserError, match="50 Hz"):
        lines_on_plan(
            fields, fields.cases[0], target(1e-6, 100.0), (1.0,), (0, 0, 1, 1)
        )


def test_load_factor_needs_a_field():
    assert load_factor(0.0) is None
    found = load_factor(0.5)
    assert found is not None
    assert found.factor == 2.0
