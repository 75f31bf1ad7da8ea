"""The user's own library: what it keeps, what it leaves out, and faulty files."""

from __future__ import annotations

import pytest

from app.library import Content, Library, read, write
from engine.criteria import LevelPoint, LevelTable, ReferenceLevel
from engine.errors import UserError
from engine.items import ValueOrigin
from engine.runs import CircuitShare, Flat, FreeSection, Slot, SlotLoad

VALUES = LevelTable(points=(LevelPoint(frequency=50.0, level=3.3e-6),))
OWN = ReferenceLevel(
    id="target",
    name="Client target",
    source="Contract, clause 7",
    category="workers",
    entered_by="A. Tester",
    values=VALUES,
    origins=(ValueOrigin(field="values", kind="document", document="contract"),),
)
INVENTED = ReferenceLevel(
    id="example-a",
    name="Example A (invented)",
    source="Invented for demonstration.",
    edition="first",
    category="workers",
    values=VALUES,
)


def test_a_level_is_kept_with_its_source_and_without_its_origins(tmp_path):
    library = Library(tmp_path / "deep" / "library.json")
    assert library.content() == Content()
    library.keep(library.content().with_level(OWN))
    (kept,) = library.content().levels
    assert kept.source == "Contract, clause 7"
    assert kept.values == VALUES
    assert kept.origins == ()


def test_an_invented_level_loses_its_source(tmp_path):
    path = tmp_path / "library.json"
    write(path, Content(levels=(INVENTED,)))
    (kept,) = read(path).levels
    assert (kept.source, kept.edition) == ("", "")
    assert kept.values == VALUES


def test_a_formation_is_kept_without_its_circuits(tmp_path):
    flat = Flat(circuits=(CircuitShare(circuit="F1"),), pitch=0.12)
    free = FreeSection(
        slots=(
            Slot(name="a", u=0.0, v=0.1, loads=(SlotLoad(circuit="F1", label="L1"),)),
        )
    )
    library = Library(tmp_path / "library.json")
    content = Content().with_formation("Bars", flat).with_formation("One", free)
    library.keep(content)
    bars, one = library.content().formations
    assert bars.section == Flat(circuits=(), pitch=0.12)
    assert one.section.slots[0].loads == ()
    with pytest.raises(UserError, match="needs a name"):
        content.with_formation(" ", flat)


def test_one_name_is_kept_once():
    again = Content().with_level(OWN).with_level(OWN)
    assert len(again.levels) == 1
    assert again.merged(again) == again
    assert again.without(level="Client target").levels == ()


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("{", "not JSON"),
        ("[]", "not a library"),
        ('{"lodestead_library": 9}', "lodestead_library"),
        ('{"lodestead_library": 1, "levels": [{"id": 3}]}', r"levels\[0\]\.id"),
        ('{"lodestead_library": 1, "extra": 1}', "extra"),
        ("[" * 100_000, "not JSON"),
    ],
)
def test_a_faulty_file_is_told_and_left_as_it_is(tmp_path, text, words):
    path = tmp_path / "library.json"
    path.write_text(text)
    with pytest.raises(UserError, match=words):
        read(path)
    assert path.read_text() == text
