"""Improved wiring of the UPS and battery room."""

from __future__ import annotations

from msgspec.structs import replace

from engine.equipment import ConductorLoop
from engine.plain_values import digest
from engine.runs import FreeSection, Round, Run
from engine.variant import BaseState, Variant, VariantItems
from rooms.invented import assumed

#: Places of the output conductors along y, 22 mm apart. [m]
CLOSE_Y = (1.40, 1.422, 1.444, 1.466)
#: From a string's go to its return. [m]
BESIDE = 0.04


def close_string(string: ConductorLoop) -> ConductorLoop:
    """The string with its return 40 mm beside its go, and 40 mm above."""
    y = string.path[0][1]
    back = round(y + BESIDE, 3)
    return replace(
        string,
        note="The return lies beside the go.",
        path=(
            (1.0, y, 2.2),
            (5.0, y, 2.2),
            (5.0, y, 0.4),
            (5.0, back, 0.4),
            (5.0, back, 2.2 + BESIDE),
            (1.0, back, 2.2 + BESIDE),
        ),
        origins=(
            *(o for o in string.origins if o.field != "path"),
            assumed("path", "Proposed."),
        ),
    )


def close_output(cables: Run) -> Run:
    """The output cables 22 mm apart, N beside the lines."""
    assert isinstance(cables.section, FreeSection)
    slots = tuple(
        replace(slot, u=round(1.5 - y, 4), shape=Round(diameter=0.022))
        for slot, y in zip(cables.section.slots, CLOSE_Y, strict=True)
    )
    return replace(
        cables,
        note="Cables of 22 mm touch each other.",
        section=FreeSection(slots=slots),
        origins=(
            *(o for o in cables.origins if not o.field.startswith("section")),
            assumed("section", "Proposed."),
        ),
    )


def variants(strings: tuple[ConductorLoop, ...], cables: Run) -> tuple[Variant, ...]:
    """One variant: every go beside its return."""
    old = (*strings, cables)
    return (
        Variant(
            id="improved-wiring",
            name="Improved wiring",
            replaced=VariantItems(
                equipment=tuple(close_string(string) for string in strings),
                runs=(close_output(cables),),
            ),
            against=tuple(BaseState(item=x.id, digest=digest(x)) for x in old),
        ),
    )
