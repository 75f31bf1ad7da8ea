"""Every field that an edit or an origin can name has words of the trade."""

from __future__ import annotations

import re
import typing

import msgspec
import pytest

from engine.equipment import ConductorLoop
from engine.field_words import _OF_KINDS, _WORDS, field_words
from engine.layout import Layout
from engine.runs import Run

#: Names that are words of the trade as they stand.
PLAIN = (
    "angle backing_drawings bars_per_pole base_frequency basis category checked_by "
    "circuit circuits clearance client closed code coefficient competence component "
    "conclusions confirmed_remarks containment core_diameter cores counted currents "
    "date decision_rule diameter direction distance document document_number "
    "documents dropper edition enclosures equipment exclusions exponent file_name "
    "floor_level flux_density flux_density_unit footprint formation frequency front "
    "front_clearance gap grid_step heights hours instrument insulation item joints "
    "kind layout_digest length_unit letterhead level lines load load_cases load_note "
    "loads locked logo measured_part name negative_angle negative_ratio net "
    "net_current neutral neutral_pitch note offset opacity outline outside_diameter "
    "page paper part_of_body path phase_relation picture pitch place points poles "
    "position prepared_by profiles program_version project question rated_current "
    "rated_power ratio receptors relative results results_digest revision revisions "
    "rooms route rule runs scope section set_pitch setback settings slab_above slot "
    "slots source status storey storeys supply terminal terminals thickness unbalance "
    "uncertainty uncertainty_rule value variants view voltage volume way ways width "
    "zero_angle zero_ratio zones"
)


def structs_of(kind, found):
    """Every struct that a layout can hold, by name."""
    for part in typing.get_args(kind):
        structs_of(part, found)
    if isinstance(kind, type) and issubclass(kind, msgspec.Struct):
        if kind.__name__ in found:
            return found
        found[kind.__name__] = kind
        for hint in typing.get_type_hints(kind, include_extras=True).values():
            structs_of(hint, found)
    return found


def test_every_field_of_a_layout_has_words():
    kinds, plain = structs_of(Layout, {}), set(re.findall(r"\w+", PLAIN))
    assert len(kinds) > 50
    names = {f.name for kind in kinds.values() for f in msgspec.structs.fields(kind)}
    assert names - set(_WORDS) - plain == set()
    # And no words for what is not there any more.
    assert set(_WORDS) | plain == names
    for kind, field in _OF_KINDS:
        assert field in kinds[kind].__struct_fields__


@pytest.mark.parametrize(
    ("path", "kind", "words"),
    [
        ("at", None, "place"),
        ("turns", ConductorLoop, "number of turns"),
        ("turns", Run, "turns of the section"),
        ("section.slots.1.u", Run, "section, slot 2, place across (u)"),
        ("origins.at", None, "origin of place"),
        ("origins", None, "origins of the values"),
    ],
)
def test_words_of_a_field(path, kind, words):
    assert field_words(path, kind) == words
