"""Layout files: what is written is read back, and every fault is told."""

from __future__ import annotations

import contextlib
import inspect as python_inspect
import json
import os
import stat
from pathlib import Path

import jsonschema
import msgspec
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from listed_values import rich_layout

import engine.layout_file as layout_file
from engine import circuits, criteria, equipment, items, migrations, places, runs
from engine.errors import UserError
from engine.layout import Layout, Settings
from engine.layout_file import decode, encode, json_schema, read, write
from engine.places import Uncertainty, Zone
from engine.runs import FreeSection, Round, Run, Slot

DATA = Path(__file__).parents[1] / "data"
SCHEMA = Path(layout_file.__file__).with_name("layout.schema.json")

RUN = Run(
    id="a",
    route=((0, 0, 0), (1.5, 0, 1e-7)),
    section=FreeSection(slots=(Slot(name="L1", u=0, v=0, shape=Round()),)),
)
SMALL = Layout(runs=(RUN,))


def faulty(layout: object, version: object = 3) -> bytes:
    return json.dumps({"lodestead_layout": version, "layout": layout}).encode()


def told(data: bytes) -> str:
    with pytest.raises(UserError) as caught:
        decode(data, "room.json")
    return str(caught.value)


def run_with(**changes: object) -> dict[str, object]:
    plain = msgspec.to_builtins(RUN)
    return {"runs": [plain | changes]}


# Round trip


def test_rich_layout_uses_every_type_of_value() -> None:
    used: set[type] = set()

    def note(value: object) -> None:
        if isinstance(value, msgspec.Struct):
            used.add(type(value))
            for name in value.__struct_fields__:
                note(getattr(value, name))
        elif isinstance(value, tuple):
            for part in value:
                note(part)

    note(rich_layout())
    modules = (items, circuits, runs, equipment, places, criteria)
    known = {
        kind
        for module in modules
        for _, kind in python_inspect.getmembers(module, python_inspect.isclass)
        if issubclass(kind, items.Value) and kind not in (items.Value, items.Item)
    }
    assert known - used == set()


@pytest.mark.parametrize("layout", [Layout(), SMALL, rich_layout()])
def test_what_is_written_is_read_back_byte_for_byte(layout: Layout) -> None:
    data = encode(layout)
    again = decode(data, "room.json")
    assert again == layout
    assert encode(again) == data


@settings(max_examples=100, deadline=None)
@given(
    st.floats(-1e5, 1e5),
    st.floats(1e-300, 1e5),
    st.text(st.characters(exclude_categories=("Cs",)), max_size=50),
)
def test_any_number_and_text_is_read_back(x: float, diameter: float, name: str) -> None:
    slot = Slot(name=name, u=x, v=-x, shape=Round(diameter=diameter))
    run = msgspec.structs.replace(RUN, section=FreeSection(slots=(slot,)))
    layout = Layout(runs=(run,))
    data = encode(layout)
    assert decode(data, "room.json") == layout
    assert encode(decode(data, "room.json")) == data


def test_defaults_are_left_out_and_short_things_stand_on_a_line() -> None:
    text = encode(SMALL).decode()
    assert json.loads(text)["layout"].keys() == {"runs"}
    assert '"route": [[0, 0, 0], [1.5, 0, 1e-07]]' in text
    assert max(map(len, encode(rich_layout()).decode().splitlines())) < 25_000


def test_a_value_that_could_not_be_read_back_is_not_written(tmp_path: Path) -> None:
    bad = Layout(settings=Settings(north=float("nan")))
    target = tmp_path / "room.json"
    with pytest.raises(UserError, match=r"settings\.north: expected a finite number"):
        write(target, bad)
    twice = Layout(runs=(RUN, RUN))
    with pytest.raises(UserError, match=r'runs\[1\]\.id: "a" is the id of runs\[0\]'):
        write(target, twice)
    assert list(tmp_path.iterdir()) == []


# Faults

ONE_FAULT = {
    "empty": (b"", ["it is empty"]),
    "blank": (b" \n\t", ["it is empty"]),
    "text": (b"Dear all,", ["not valid JSON", "line 1, column 1"]),
    "second line": (b'{"lodestead_layout": 3,\n nothing}', ["line 2, column 2"]),
    "truncated": (encode(SMALL)[:-20], ["ends too early"]),
    "truncated in text": (b'{"lodestead_l', ["ends too early"]),
    "two documents": (faulty({}) * 2, ["not valid JSON", "Extra data"]),
    "UTF-16": ("{}".encode("utf-16"), ["UTF-16", "save it as UTF-8"]),
    "Latin-1": ('{\n"é"'.encode("latin-1"), ["not UTF-8 text (line 2)"]),
    "picture": (b"\x89PNG\r\n\x1a\n\0\0", ["not UTF-8 text"]),
    "list": (b"[]", ["it is not a layout"]),
    "number": (b"7", ["it is not a layout"]),
    "other JSON": (b'{"rooms": []}', ["it is not a layout"]),
    "version text": (faulty({}, "2"), ["lodestead_layout", "whole number from 1 to 3"]),
    "version true": (faulty({}, True), ["lodestead_layout", "whole number"]),
    "version zero": (faulty({}, 0), ["lodestead_layout", "whole number"]),
    "version 2.5": (faulty({}, 2.5), ["lodestead_layout", "whole number"]),
    "future": (faulty({}, 4), ["newer version of the program", "form 4", "up to 3"]),
    "far future": (faulty({}, 10**40), ["newer version of the program"]),
    "no layout": (b'{"lodestead_layout": 3}', ["layout: is missing"]),
    "layout a list": (faulty([]), ["layout: expected an object, got a list"]),
    "old, a list": (faulty([], 1), ["layout: expected an object, got a list"]),
    "beside": (
        b'{"lodestead_layout": 3, "layout": {}, "extra": 1}',
        ["extra: is no field that is known here"],
    ),
    "deep": (b"[" * 200_000, ["nested too deeply"]),
    "deepish": (
        b'{"lodestead_layout": 3, "layout": ' + b"[" * 99 + b"]" * 99 + b"}",
        ["nested more than 40 levels"],
    ),
    "many": (b"[" + b"[]," * 5_000_001 + b"[]]", ["more than 5,000,000 entries"]),
    "twice": (
        b'{"lodestead_layout": 3, "layout": {"runs": [], "runs": []}}',
        ["runs: stands more than once"],
    ),
    "twice inside": (
        b'{"lodestead_layout": 3, "layout": {"title": {"id": "t", "id": "t"}}}',
        ["title.id: stands more than once"],
    ),
    "twice, old": (
        b'{"lodestead_layout": 1, "layout": {"defaults": {}, "defaults": {}}}',
        ['"defaults" stands more than once'],
    ),
    "unknown": (faulty({"rums": []}), ["rums: is no field", 'perhaps "runs" is meant']),
    "odd name": (faulty({"a b\n": 1}), ['"a b\\n": is no field']),
    "not a list": (faulty({"runs": {}}), ["runs: expected a list", "got an object"]),
    "null": (faulty({"runs": None}), ["runs: expected a list", "got null"]),
    "null item": (faulty({"runs": [None]}), ["runs[0]: expected an object, got null"]),
    "missing": (
        faulty({"storeys": [{"id": "a"}]}),
        ["storeys[0].floor_level: is missi"],
    ),
    "no id": (faulty({"storeys": [{"floor_level": 0}]}), ["storeys[0].id: is missing"]),
    "bad id": (
        faulty(run_with(id="Öl")),
        ["runs[0].id: expected an id", 'got "Öl"'],
    ),
    "id with line end": (faulty(run_with(id="a\n")), ["runs[0].id: expected an id"]),
    "long id": (faulty(run_with(id="a" * 81)), ["runs[0].id: expected an id"]),
    "text for number": (
        faulty(run_with(rated_current="abc")),
        ["runs[0].rated_current: expected a number greater than 0", 'got "abc"'],
    ),
    "true for number": (faulty(run_with(rated_current=True)), ["got true"]),
    "negative": (faulty(run_with(rated_current=-5)), ["greater than 0", "got -5"]),
    "number for text": (faulty(run_with(note=7)), ["runs[0].note: expected text", "7"]),
    "long text": (faulty(run_with(name="x" * 401)), ["at most 400 characters"]),
    "choice": (
        faulty(run_with(kind="pipe")),
        ["runs[0].kind: expected one of", '"busbar"', 'got "pipe"'],
    ),
    "unknown tag": (
        faulty(run_with(section={"type": "flatt"})),
        ["runs[0].section.type: expected one of", '"sandwich"', 'got "flatt"'],
    ),
    "no tag": (faulty(run_with(section={})), ["runs[0].section.type: is missing"]),
    "tag of the wrong kind": (faulty(run_with(section={"type": [1]})), ["got a list"]),
    "tag of another field": (
        faulty(
            run_with(
                section={
                    "type": "quad",
                    "circuits": [],
                    "shape": {"type": "bar", "diameter": 1},
                }
            )
        ),
        ['runs[0].section.shape.type: expected "round", got "bar"'],
    ),
    "two coordinates": (
        faulty(run_with(route=[[0, 0, 0], [1, 1]])),
        ["runs[0].route[1]: expected a list of 3 entries, got 2 of them"],
    ),
    "one vertex": (faulty(run_with(route=[[0, 0, 0]])), ["list of 2 to 500 entries"]),
    "too many vertices": (
        faulty(run_with(route=[[i, 0, 0] for i in range(501)])),
        ["runs[0].route: expected a list of 2 to 500 entries, got 501 of them"],
    ),
    "far away": (
        faulty(run_with(route=[[0, 0, 0], [1e5, 2e5, 0]])),
        ["runs[0].route[1][1]: expected a number", "not greater than 100000"],
    ),
    "half a character": (
        faulty({"title": {"id": "t", "name": "\ud800"}}),
        ["title.name: has half a character"],
    ),
    "infinite": (
        b'{"lodestead_layout": 3, "layout": {"settings": {"north": 1e999}}}',
        ["settings.north: expected a finite number"],
    ),
    "not a number": (
        b'{"lodestead_layout": 3, "layout": {"settings": {"north": NaN}}}',
        ["settings.north: expected a finite number"],
    ),
    "endless digits": (
        b'{"lodestead_layout": 3, "layout": {"settings": {"north": 1%s}}}'
        % (b"0" * 10_000),
        ["settings.north: expected a finite number"],
    ),
    "too many runs": (
        faulty({"documents": [{"id": f"d{i}"} for i in range(1001)]}),
        ["documents: expected a list of at most 1000 entries, got 1001 of them"],
    ),
    "same id": (
        faulty({"storeys": [{"id": "a", "floor_level": 0}]} | run_with()),
        ['runs[0].id: "a" is the id of storeys[0] already'],
    ),
    "old and odd": (
        faulty({"defaults": {"map_range": [1]}}, 1),
        ["a file of version 1", "settings.map_range: is no field"],
    ),
    "old defaults a text": (faulty({"defaults": "x"}, 1), ["defaults: is no field"]),
}


@pytest.mark.parametrize("name", ONE_FAULT)
def test_a_fault_is_told_with_its_place(name: str) -> None:
    data, parts = ONE_FAULT[name]
    sentence = told(data)
    assert sentence.startswith("room.json was not opened")
    assert "\n" not in sentence
    assert sentence.endswith(".")
    for part in parts:
        assert part in sentence


def test_all_faults_are_told_at_once() -> None:
    layout = {
        "title": {"id": "title", "projekt": "x"},
        "runs": [
            run_with(kind="pipe", route=[[0, 0]])["runs"][0],  # type: ignore[index]
            3,
        ],
        "zones": [{"id": "z", "outline": [[0, 0], [1, 0], ["a", 1]], "heights": []}],
    }
    sentence = told(faulty(layout))
    for path in (
        "title.projekt",
        "runs[0].kind",
        "runs[0].route",
        "runs[0].route[0]",
        "runs[1]",
        "zones[0].outline[2][0]",
        "zones[0].heights",
    ):
        assert f"\n- {path}: " in sentence
    assert "for 7 reasons" in sentence


def test_a_flood_of_faults_is_cut_short() -> None:
    sentence = told(faulty({"runs": [0] * 20_000}))
    assert len(sentence.splitlines()) == 42
    assert "- And 960 more faults." in sentence


def test_a_long_value_is_shortened_in_the_sentence() -> None:
    assert len(told(faulty(run_with(kind="x" * 100_000)))) < 500


def test_too_many_conductor_pieces_are_refused() -> None:
    slots = tuple(Slot(name=str(i), u=i, v=0) for i in range(200))
    route = tuple((float(i), 0.0, 0.0) for i in range(500))
    many = tuple(
        Run(id=f"r{i}", route=route, section=FreeSection(slots=slots))
        for i in range(11)
    )
    with pytest.raises(UserError, match=r"runs: all together they have 1,097,800"):
        encode(Layout(runs=many))


def test_too_many_carried_currents_are_refused() -> None:
    flat = runs.Flat(circuits=(runs.CircuitShare(circuit="c"),) * 250_001)
    run = msgspec.structs.replace(RUN, section=flat)
    with pytest.raises(UserError, match=r"runs: .* slots carry 1,000,004 currents"):
        encode(Layout(runs=(run,)))


@pytest.mark.parametrize("kept", range(0, len(encode(SMALL)) - 2, 7))
def test_no_truncated_file_is_opened(kept: int) -> None:
    assert told(encode(SMALL)[:kept]).startswith("room.json was not opened: it ")


@settings(max_examples=300, deadline=None)
@given(st.data())
def test_a_damaged_file_gives_a_layout_or_a_sentence(data: st.DataObject) -> None:
    content = bytearray(encode(SMALL))
    place = data.draw(st.integers(0, len(content) - 1))
    content[place] = data.draw(st.integers(0, 255))
    with contextlib.suppress(UserError):
        decode(bytes(content), "room.json")


def test_a_byte_order_mark_does_no_harm() -> None:
    assert decode(b"\xef\xbb\xbf" + encode(SMALL), "room.json") == SMALL


# Reading and writing


def test_a_file_is_replaced_whole_and_keeps_its_permissions(tmp_path: Path) -> None:
    target = tmp_path / "room.json"
    write(target, SMALL)
    assert read(target) == SMALL
    target.chmod(0o640)
    write(target, Layout())
    assert read(target) == Layout()
    if os.name == "posix":
        assert stat.S_IMODE(target.stat().st_mode) == 0o640
    assert [path.name for path in tmp_path.iterdir()] == ["room.json"]


@pytest.mark.parametrize("step", ["fsync", "replace"])
def test_the_old_file_survives_a_failure(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, step: str
) -> None:
    target = tmp_path / "room.json"
    write(target, SMALL)

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, step, full)
    with pytest.raises(UserError, match=r"room\.json was not .*[Nn]o space left"):
        write(target, Layout())
    monkeypatch.undo()
    assert read(target) == SMALL
    assert [path.name for path in tmp_path.iterdir()] == ["room.json"]


@pytest.mark.skipif(os.name != "posix", reason="links need rights on Windows")
def test_a_link_stays_a_link(tmp_path: Path) -> None:
    target = tmp_path / "room.json"
    write(target, SMALL)
    link = tmp_path / "current.json"
    link.symlink_to(target)
    write(link, Layout())
    assert link.is_symlink()
    assert read(target) == Layout()


def test_what_is_no_file_is_told(tmp_path: Path) -> None:
    with pytest.raises(UserError, match=r"gone\.json was not opened: there is no such"):
        read(tmp_path / "gone.json")
    with pytest.raises(UserError, match="it is not a file"):
        read(tmp_path)
    with pytest.raises(UserError, match="was not opened"):
        read("a\0b")
    with pytest.raises(UserError, match="was not "):
        write(tmp_path, SMALL)
    with pytest.raises(UserError, match=r"x\.json was not "):
        write(tmp_path / "no folder" / "x.json", SMALL)


def test_a_file_that_is_too_large_is_refused(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    target = tmp_path / "room.json"
    write(target, SMALL)
    monkeypatch.setattr(layout_file, "MAX_BYTES", 50)
    with pytest.raises(UserError, match="it is larger than"):
        read(target)


# Older files, and the schema


def test_a_file_of_version_1_becomes_the_present_layout() -> None:
    layout = read(DATA / "version-1-small-room.json")
    assert layout.settings == Settings(
        frequency=60,
        flux_density_unit="mG",
        map_low=1e-8,
        map_high=2e-4,
        uncertainty=Uncertainty(relative=0.3),
    )
    desk, door = layout.zones
    assert desk == Zone(
        id="desk",
        outline=((1, 1), (2, 1), (2, 2), (1, 2)),
        floor_level=-2.8,
        heights=(1.1,),
    )
    assert door.floor_level is None
    assert door.storey == "cellar"
    assert layout.confirmed_remarks == ()
    assert layout.title.project == "Corner shop, cellar"
    assert [run.id for run in layout.runs] == ["feeder"]
    assert decode(encode(layout), "again") == layout


def test_a_file_of_version_2_has_no_variants_and_entered_uncertainties() -> None:
    data = (DATA / "version-2-switch-room.json").read_bytes()
    assert json.loads(data)["lodestead_layout"] == 2
    layout = decode(data, "old.json")
    assert layout.variants == ()
    assert layout.settings.uncertainty.kind == "entered"
    assert [run.id for run in layout.runs] == ["incoming-bars", "chiller-cables"]
    again = encode(layout)
    assert decode(again, "again") == layout
    # Nothing but the version of the form has come to the text.
    assert again == data.replace(b'"lodestead_layout": 2', b'"lodestead_layout": 3')


def test_ids_in_a_variant_are_unique() -> None:
    run = msgspec.to_builtins(RUN)
    variant = {"id": "v", "replaced": {"runs": [run]}, "added": {"runs": [run]}}
    text = told(faulty({"variants": [variant]}))
    assert "variants[0].added.runs[0].id" in text
    assert "variants[0].replaced.runs[0] already" in text


def test_a_migration_leaves_its_input_alone() -> None:
    old = {"defaults": {"unit": "mG"}, "zones": [{"floor": 1}]}
    kept = json.dumps(old)
    migrations.migrated(old, 1)
    assert json.dumps(old) == kept
    with pytest.raises(ValueError, match="no migration from version 4"):
        migrations.migrated(old, 4)


def test_the_published_schema_is_that_of_the_types() -> None:
    published = json.loads(SCHEMA.read_text(encoding="utf-8"))
    assert published == json.loads(json.dumps(json_schema()))
    assert published["title"] == "Lodestead layout"
    assert "$id" not in published


@pytest.mark.parametrize("layout", [Layout(), SMALL, rich_layout()])
def test_files_follow_the_published_schema(layout: Layout) -> None:
    validator = jsonschema.Draft202012Validator(json_schema())
    validator.check_schema(json_schema())
    validator.validate(json.loads(encode(layout)))


@pytest.mark.parametrize("name", ["unknown", "choice", "bad id", "negative", "no tag"])
def test_the_schema_refuses_what_the_program_refuses(name: str) -> None:
    validator = jsonschema.Draft202012Validator(json_schema())
    assert not validator.is_valid(json.loads(ONE_FAULT[name][0]))
