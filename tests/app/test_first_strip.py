"""The strip of the first start: filled in by the place, and kept with one press."""

from __future__ import annotations

from app.first_strip import FirstStrip
from app.preferences import Preferences


def strip_of(qtbot, choices):
    made = FirstStrip(choices)
    qtbot.addWidget(made)
    made.show()
    return made


def test_it_is_filled_in_and_kept_as_it_is(qtbot):
    given = Preferences(
        frequency=60, flux_density_unit="mG", length_unit="ft", paper="Letter"
    )
    strip = strip_of(qtbot, given)
    assert strip.buttons["length_unit", "ft"].isChecked()
    assert not strip.buttons["length_unit", "m"].isChecked()
    with qtbot.waitSignal(strip.chosen) as chosen:
        strip.keep.click()
    assert chosen.args == [given]


def test_each_choice_can_be_changed(qtbot):
    strip = strip_of(qtbot, Preferences())
    for key in (
        ("frequency", 60), ("flux_density_unit", "mG"),
        ("length_unit", "ft"), ("paper", "Letter"),
    ):  # fmt: skip
        strip.buttons[key].click()
    assert strip.choices == Preferences(
        frequency=60, flux_density_unit="mG", length_unit="ft", paper="Letter"
    )
    strip.buttons["paper", "A4"].click()
    assert strip.choices.paper == "A4"


def test_a_rarer_choice_is_offered_too(qtbot):
    strip = strip_of(qtbot, Preferences(length_unit="mm"))
    assert strip.buttons["length_unit", "mm"].isChecked()


def test_everything_explains_itself(qtbot):
    strip = strip_of(qtbot, Preferences())
    for button in (*strip.buttons.values(), strip.keep):
        assert button.toolTip()
        assert button.accessibleName() or button.text()
