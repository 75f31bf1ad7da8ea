"""What is typed is understood exactly, or refused with a sentence."""

from __future__ import annotations

import pytest

from app.entry_words import angle, entry, walked
from app.tools.tool import Entry
from engine.errors import UserError
from engine.typed_lengths import typed_length


def test_to_is_a_place() -> None:
    assert entry("to 3.2 -0.35 z 2.6") == Entry("point", 3.2, -0.35, 2.6)
    assert entry("to 3.2 -0.35") == Entry("point", 3.2, -0.35)
    assert entry("TO z 2.6") == Entry("point", z=2.6)
    assert entry("to 1 2 3") == Entry("point", 1.0, 2.0, 3.0)
    assert entry("to y 2 x 1") == Entry("point", 1.0, 2.0)


def test_by_is_a_way() -> None:
    assert entry("by 1.2 -0.4") == Entry("point", 1.2, -0.4, is_relative=True)
    assert entry("by z -0.5") == Entry("point", z=-0.5, is_relative=True)


def test_go_counts_its_angle_from_x_counter_clockwise() -> None:
    assert entry("go 2.4 toward 90") == Entry("point", 0.0, 2.4, is_relative=True)
    assert entry("go 2 toward 180°").x == -2.0
    assert entry("go 2 toward -90").y == -2.0
    aslant = entry("go 2 toward 30 up 0.3")
    assert aslant.x == pytest.approx(3**0.5, abs=1e-9)
    assert aslant.y == pytest.approx(1.0)
    assert aslant.z == 0.3
    assert entry("go 1 toward 0 down 0.3").z == -0.3


def test_size_goes_along_x_and_y() -> None:
    assert entry("size 10 6") == Entry("size", size=(10.0, 6.0))
    assert entry("size 10ft6in 320mm").size == (3.2004, 0.32)


@pytest.mark.parametrize("word", ["320mm", "-10ft6in", "10'6\"", "−1.5m", "+2", "0"])
def test_lengths_are_those_of_every_field(word: str) -> None:
    assert entry(f"to {word} 0").x == typed_length(word)


def test_a_number_alone_is_in_the_unit_that_is_shown() -> None:
    assert entry("to 100 200", unit="mm") == Entry("point", 0.1, 0.2)


def test_the_locale_writes_a_comma() -> None:
    assert entry("to 3,2 -0,35", decimal=",") == Entry("point", 3.2, -0.35)
    assert entry("to 3.2 1", decimal=",") == Entry("point", 3.2, 1.0)
    assert angle("22,5", decimal=",") == 22.5


@pytest.mark.parametrize("text", ["to 3,2", "to 1,200 4", "go 2 toward 22,5"])
def test_a_comma_never_parts_numbers_nor_thousands(text: str) -> None:
    with pytest.raises(UserError, match="comma"):
        entry(text)


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("", "Nothing is entered"),
        ("3.2 1", "Begin with to, by, go or size"),
        ("put 3 4", "“put” is not understood"),
        ("to", "Numbers are missing"),
        ("to 3 b", "“b” is not a length"),
        ("to 1 2 3 4", "one number too many"),
        ("to 1 2 x 3", "x is entered twice"),
        ("to 1 2 z", "missing after “z”"),
        ("to x y 3", "needs a number"),
        ("go 2.4", "takes a length and a direction"),
        ("go 2.4 toward north", "no direction"),
        ("go 2.4 toward 90 over 2", "write up or down"),
        ("size 10", "takes two lengths"),
        ("size 10 0", "other than 0"),
        ("to 6in10ft 0", "not a length"),
        ("to 10ft6 0", "not a length"),
        ("to 1 km", "not a length"),
        ("to 1e9 2", "more than 100 km"),
        ("to 999999999 2", "more than 100 km"),
        ("to nan 2", "not a length"),
        ("to 1--2 2", "not a length"),
    ],
)
def test_what_is_not_understood_is_told_in_a_sentence(text: str, told: str) -> None:
    with pytest.raises(UserError, match=told) as caught:
        entry(text)
    assert str(caught.value).endswith(".")


def test_walks_along_the_axes_are_exact() -> None:
    for toward, way in ((0, (1, 0)), (90, (0, 1)), (180, (-1, 0)), (270, (0, -1))):
        found = walked(0.7, toward)
        assert (found.x, found.y) == (0.7 * way[0], 0.7 * way[1])
