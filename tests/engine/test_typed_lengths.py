"""Lengths as typed: units, feet with inches, decimal signs, and what is refused."""

from __future__ import annotations

import pytest

from engine.errors import UserError
from engine.typed_lengths import length_text, typed_length
from engine.units import LENGTH_UNITS


@pytest.mark.parametrize(
    ("text", "metres"),
    [
        ("320mm", 0.32),
        ("320 mm", 0.32),
        ("10ft6in", 126 * 0.0254),
        ("10' 6\"", 126 * 0.0254),
        ("-10ft 6in", -126 * 0.0254),
        ("2.4", 2.4),
        ("−0.35 m", -0.35),
        ("35cm", 0.35),
        ("2,4", 2.4),
        (".5", 0.5),
        ("+2", 2.0),
        ("4.5in", 0.1143),
        ("1e3mm", 1.0),
    ],
)
def test_typed_lengths_are_metres(text, metres):
    assert typed_length(text) == pytest.approx(metres, rel=1e-12)


def test_feet_and_inches_are_exact_decimals():
    assert typed_length("10ft6in") == 3.2004
    assert typed_length("-10'6\"") == -3.2004


def test_a_length_beyond_any_site_is_a_wrong_unit():
    assert typed_length("100000") == 1e5
    with pytest.raises(UserError, match="more than 100 km"):
        typed_length("100001")


def test_a_bare_number_is_in_the_fields_unit():
    assert typed_length("320", "mm") == 0.32
    assert typed_length("6", "in") == pytest.approx(0.1524)


@pytest.mark.parametrize("text", ["", "two", "1m2", "6in10ft", "5 kg", "1e400", "3 4"])
def test_what_is_no_length_is_refused(text):
    with pytest.raises(UserError):
        typed_length(text)


def test_a_sign_between_thousands_is_never_taken_for_a_decimal_sign():
    with pytest.raises(UserError, match="two ways"):
        typed_length("1,600", "mm")
    assert typed_length("1,625", "m", ",") == 1.625


@pytest.mark.parametrize("unit", LENGTH_UNITS)
@pytest.mark.parametrize("metres", [0.0, 0.0285, -1.35, 123.456, 1e-7])
def test_a_length_shown_reads_as_the_same_length(unit, metres):
    assert typed_length(length_text(metres, unit)) == pytest.approx(
        metres, abs=1e-5 if metres > 1e-5 else 1e-12, rel=1e-5
    )
