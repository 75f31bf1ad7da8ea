"""A map draws a reference level only where its line says something true."""

from __future__ import annotations

from msgspec.structs import replace

from engine.criteria import (
    LevelPoint,
    LevelRange,
    LevelRanges,
    LevelTable,
    ReferenceLevel,
)
from engine.layout import Layout
from engine.picture.references import reference_lines

LEVEL = ReferenceLevel(
    id="a",
    name="Example A (invented)",
    source="invented for this test",
    category="workers",
    values=LevelRanges(
        ranges=(LevelRange(f_from=10, f_to=1000, coefficient=3.65e-4, exponent=1),)
    ),
)


def test_the_value_is_that_at_the_supply_frequency():
    (line,), note = reference_lines(Layout(levels=(LEVEL,)), (50.0,))
    assert (line.name, line.value) == ("Example A (invented)", 3.65e-4 / 50)
    assert note == "reference level at 50 Hz"


def test_several_frequencies_are_said():
    _, note = reference_lines(Layout(levels=(LEVEL,)), (50.0, 150.0))
    assert "comparisons count every frequency" in note


def test_a_supply_at_another_frequency_counts():
    (line,), note = reference_lines(Layout(levels=(LEVEL,)), (400.0,))
    assert line.value == 3.65e-4 / 400
    assert note == "reference level at 400 Hz"


def test_levels_that_a_line_cannot_show_are_counted():
    levels = (
        replace(LEVEL, basis="peak"),
        replace(LEVEL, id="b", component="axis"),
        replace(LEVEL, id="c", source=""),
        replace(LEVEL, id="d", category=""),
        replace(LEVEL, id="e", values=None),
    )
    lines, note = reference_lines(Layout(levels=levels), (50.0,))
    assert lines == ()
    assert note == "reference levels not drawn: 5"


def test_direct_current_has_its_own_level():
    assert reference_lines(Layout(levels=(LEVEL,)), (0.0,)) == (
        (),
        "reference levels not drawn: 1",
    )
    row = LevelTable(points=(LevelPoint(frequency=0, level=4.3e-4),))
    (line,), note = reference_lines(
        Layout(levels=(replace(LEVEL, values=row),)), (0.0,)
    )
    assert line.value == 4.3e-4
    assert note == "reference level at 0 Hz"


def test_nothing_that_flows_has_no_line():
    assert reference_lines(Layout(levels=(LEVEL,)), ()) == ((), "")
