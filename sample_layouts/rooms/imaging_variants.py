"""What can be mended in the imaging department's riser shaft, step by step."""

from __future__ import annotations

from msgspec.structs import replace

from engine.circuits import Circuit
from engine.plain_values import digest
from engine.runs import ParallelSets, Round, Run
from engine.variant import BaseState, Variant, VariantItems
from rooms.invented import assumed

#: Forwards, backwards, forwards: the middle set mirrors its neighbours.
MIRRORED = (
    ("L1", "L2", "L3", "N"),
    ("N", "L3", "L2", "L1"),
    ("L1", "L2", "L3", "N"),
)


def variants(
    circuits: tuple[Circuit, ...], runs: tuple[Run, ...]
) -> tuple[Variant, ...]:
    """The bond removed, the neutral of R3 returned, both, and R2 close together too."""
    feeder = next(circuit for circuit in circuits if circuit.id == "R2")
    neutral = next(run for run in runs if run.id == "R3-neutral")
    ladder = next(run for run in runs if run.id == "R2-ladder")
    bonded_once = replace(
        feeder,
        note="The second neutral-earth bond is removed: nothing leaves the ladder.",
        net_current=None,
        origins=(
            *(o for o in feeder.origins if o.field != "net_current"),
            assumed("net_current", "None is left without the second bond."),
        ),
    )
    returned = replace(
        neutral,
        note="Laid beside its lines.",
        route=tuple((8.09, -0.20, z) for _, _, z in neutral.route),
        origins=(
            *(o for o in neutral.origins if o.field != "route"),
            assumed("route", "Proposed."),
        ),
    )
    assert isinstance(ladder.section, ParallelSets)
    close = replace(
        ladder,
        note="Cables of 27 mm touch each other; the middle set runs backwards. The "
        "cables of a pole are taken to share equally.",
        section=replace(
            ladder.section,
            orders=MIRRORED,
            pitch=0.027,
            set_pitch=0.108,
            shape=Round(diameter=0.027),
        ),
        origins=(
            *(o for o in ladder.origins if not o.field.startswith("section")),
            assumed("section", "Proposed."),
        ),
    )
    steps = (
        ("bond-removed", "Second bond removed", (feeder,), (bonded_once,)),
        ("neutral-returned", "Neutral of R3 beside its lines", (neutral,), (returned,)),
        (
            "both",
            "Bond removed and neutral returned",
            (feeder, neutral),
            (bonded_once, returned),
        ),
        (
            "both-and-close",
            "Both, and R2 close together",
            (feeder, ladder, neutral),
            (bonded_once, close, returned),
        ),
    )
    return tuple(
        Variant(
            id=id_,
            name=name,
            replaced=VariantItems(
                circuits=tuple(x for x in new if isinstance(x, Circuit)),
                runs=tuple(x for x in new if isinstance(x, Run)),
            ),
            against=tuple(BaseState(item=x.id, digest=digest(x)) for x in old),
        )
        for id_, name, old, new in steps
    )
