"""The base and its variants side by side: the table, and maps of differences."""

from __future__ import annotations

import json
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from msgspec.structs import replace

from engine import layout_file
from engine.assessment import assess
from engine.difference_maps import difference_map, variant_map
from engine.edits import replaced
from engine.errors import UserError
from engine.layout import Layout
from engine.maps import field_map
from engine.variant import Variant
from engine.variant_comparison import (
    Row,
    VariantComparison,
    change,
    column_of,
    compare_variants,
    comparison_table,
)
from engine.variants import edited_in_variant, layout_of

ROOT = Path(__file__).parents[2]
CORRIDOR = ROOT / "sample_layouts" / "imaging-corridor.json"
LABORATORY = ROOT / "sample_layouts" / "battery-laboratory.json"


@pytest.fixture(scope="module")
def corridor() -> Layout:
    return layout_file.read(CORRIDOR)


@pytest.fixture(scope="module")
def table(corridor: Layout) -> VariantComparison:
    return compare_variants(corridor)


def row(table: VariantComparison, place: str, kind: str | None = None) -> Row:
    return next(r for r in table.rows if r.place == place and r.kind == kind)


def test_removing_the_second_bond_raises_the_bed_and_lowers_all_others(
    corridor: Layout, table: VariantComparison
) -> None:
    at = [column.variant for column in table.columns].index("bond-removed")
    by_place = {r.place: r.cells[at] for r in table.rows}
    # Stated in the room's description: the bed rises by 14 %, all else falls.
    assert by_place["stress-test-bed"].change == "higher"
    assert by_place["stress-test-bed"].relative == pytest.approx(0.14, abs=0.01)
    others = {r.id for r in corridor.receptors} - {"stress-test-bed"}
    assert len(others) == 5
    assert {by_place[id].change for id in others} == {"lower"}
    assert table.raised() == (
        ("bond-removed", "bed-zone"),
        ("bond-removed", "stress-test-bed"),
    )


def test_mending_both_lowers_every_place(table: VariantComparison) -> None:
    names = [column.variant for column in table.columns]
    assert names == [
        None, "bond-removed", "neutral-returned", "both", "both-and-close",
    ]  # fmt: skip
    for r in table.rows:
        values = [cell.value for cell in r.cells]
        assert all(value is not None for value in values)
        assert values[0] > values[3] > values[4], r.place


def test_the_table_holds_what_assessments_say(
    corridor: Layout, table: VariantComparison
) -> None:
    assessment = assess(layout_of(corridor, "both"))
    bed = next(c for c in assessment.comparisons if c.place == "stress-test-bed")
    assert bed.counted
    cell = row(table, "stress-test-bed").cells[3]
    assert (cell.value, cell.ratio, cell.state) == (bed.value, bed.ratio, bed.state)
    assert cell.case == bed.case == "as-logged"


def test_direct_current_is_compared_on_its_own() -> None:
    made = compare_variants(layout_file.read(LABORATORY))
    assert made.raised() == ()
    rack = row(made, "rack", "DC")
    assert rack.cells[0].case == rack.cells[1].case == "discharge"
    # The listed loop field of the improved wiring is a small part of the first.
    assert rack.cells[1].relative == pytest.approx(-0.987, abs=0.002)
    level = next(r for r in made.rows if r.place == "rack" and r.level)
    assert (level.cells[0].kind, level.cells[1].kind) == ("DC", "AC")
    assert level.cells[1].change == "not comparable"
    assert level.cells[1].ratio_change == "lower"


def test_change_is_the_same_within_a_hundredth() -> None:
    assert change(100.0, 101.0) == change(100.0, 99.0) == "same within 1 %"
    assert (change(100.0, 101.1), change(100.0, 98.9)) == ("higher", "lower")
    assert change(0.0, 0.0) == "same within 1 %"
    assert change(0.0, 1e-12) == "higher"
    assert change(None, 1.0) == change(1.0, None) == "not comparable"


def test_places_that_are_not_in_both_say_so(corridor: Layout) -> None:
    base = replace(corridor, variants=(Variant(id="v"),), zones=())
    own = layout_of(base, "v")
    desk, *others = own.receptors
    moved = replace(others[0], at=(7.5, 0.3, 1.0))
    more = replace(desk, id="more", name="More")
    layout = edited_in_variant(
        base, "v", replace(own, receptors=(moved, *others[1:], more))
    )
    made = compare_variants(layout)
    gone = next(r for r in made.rows if r.place == desk.id)
    assert gone.cells[1].value is None
    assert gone.cells[1].change == "not comparable"
    assert row(made, "more").cells[0].reason == "It is not in this layout."
    assert row(made, "more").cells[1].value is not None
    assert row(made, moved.id).cells[1].place_differs
    assert not row(made, others[1].id).cells[1].place_differs


def test_other_load_cases_are_named(corridor: Layout) -> None:
    own = layout_of(corridor, "both")
    case = replace(own.load_cases[0], factors=())
    night = replace(case, id="night", name="Night")
    layout = edited_in_variant(
        corridor, "both", replace(own, load_cases=(*own.load_cases, night))
    )
    column = column_of(layout, "both", assess(layout_of(layout, "both")))
    assert column.differing_cases == ("night",)


def test_the_first_column_is_the_base(table: VariantComparison) -> None:
    with pytest.raises(ValueError, match="base must be the first"):
        comparison_table(table.columns[1:])


# ---- maps of differences


def test_identical_variants_give_a_zero_map(corridor: Layout) -> None:
    layout = replace(corridor, variants=(Variant(id="v"), Variant(id="w")))
    made = variant_map(layout, "v", "as-logged", (1.0,), against="w", step=0.5)
    assert np.all(made.difference == 0)
    assert np.all(made.ratio == 1)
    assert made.has_ratio.any()
    assert made.dc_difference is None
    # A variant that replaces an item by an equal one is no other.
    run = corridor.runs[0]
    same = edited_in_variant(
        layout, "v", replaced(layout_of(layout, "v"), replace(run, note=run.note))
    )
    assert same is layout


def test_a_difference_map_shows_where_the_field_rises(corridor: Layout) -> None:
    area = (3.9, 4.3, 4.1, 4.5)
    made = variant_map(
        corridor, "bond-removed", "as-logged", (0.8,), area=area, step=0.1
    )
    # Around the bed at (4.0, 4.4, 0.8).
    iy, ix = np.argmin(abs(made.base.ys - 4.4)), np.argmin(abs(made.base.xs - 4.0))
    assert made.ratio[iy, ix] == pytest.approx(1.137, abs=0.002)
    assert made.difference[iy, ix] == pytest.approx(1.93e-7, rel=0.01)
    difference = made.variant.values - made.base.values
    np.testing.assert_allclose(made.difference, difference)


def test_maps_of_other_grids_are_refused(corridor: Layout) -> None:
    case = corridor.load_cases[0]
    one = field_map(corridor, case, (1.0,), area=(0, 0, 1, 1), step=0.5)
    other = field_map(corridor, case, (1.0,), area=(0, 0, 2, 1), step=0.5)
    higher = field_map(corridor, case, (1.2,), area=(0, 0, 1, 1), step=0.5)
    for wrong in (other, higher):
        with pytest.raises(ValueError, match="same grid"):
            difference_map(one, wrong)


def test_a_case_that_one_lacks_is_told(corridor: Layout) -> None:
    with pytest.raises(UserError, match="no load case “night”"):
        variant_map(corridor, "both", "night", (1.0,))


# ---- commands


def command(*arguments: object) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-W", "error", "-m", "engine", *map(str, arguments)],
        cwd=ROOT,
        capture_output=True,
        encoding="utf-8",
        timeout=300,
        check=False,
    )


def test_compare_prints_the_table() -> None:
    done = command("compare", CORRIDOR, "--unit", "mG")
    assert done.returncode == 0, done.stderr
    assert "Second bond removed raises: " in done.stdout
    assert "higher +14 %" in done.stdout
    assert "µT" not in done.stdout


def test_compare_as_json_holds_the_table(table: VariantComparison) -> None:
    done = command("compare", CORRIDOR, "--json")
    answer = json.loads(done.stdout)
    assert [c["variant"] for c in answer["columns"]][:2] == [None, "bond-removed"]
    found = next(r for r in answer["rows"] if r["place"] == "stress-test-bed")
    cell = row(table, "stress-test-bed").cells[1]
    assert found["cells"][1]["value_T"] == cell.value
    assert found["cells"][1]["state"] == cell.state


def test_assess_takes_a_variant_by_name(corridor: Layout) -> None:
    done = command("assess", CORRIDOR, "--variant", "Second bond removed", "--json")
    assert done.returncode == 1
    bed = next(
        r for r in json.loads(done.stdout)["receptors"] if r["id"] == "stress-test-bed"
    )
    assessment = assess(layout_of(corridor, "bond-removed"))
    own = next(r for r in assessment.receptors if r.receptor.id == "stress-test-bed")
    assert bed["fields"][0]["ac_T"] == own.fields[0].ac


def test_an_unknown_variant_is_explained() -> None:
    done = command("assess", CORRIDOR, "--variant", "nothing")
    assert done.returncode == 2
    assert "There is no variant “nothing”" in done.stderr
