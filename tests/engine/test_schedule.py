"""Conductor schedules: what a row states is what flows, and faults name their line."""

from __future__ import annotations

import cmath
import hashlib
import itertools
import math
import random
from collections import Counter
from pathlib import Path

import pytest
from msgspec import inspect

from engine.circuits import Circuit, DirectCurrents
from engine.conductors import conductors, nodes
from engine.currents import case_phasors, conductor_currents, load_current
from engine.errors import UserError
from engine.exchange import schedule, schedule_conductors
from engine.exchange.schedule import read_schedule, schedule_layout
from engine.layout import Layout
from engine.layout_file import decode, encode
from engine.runs import Bar, FreeSection, Joint, Round, Run

HEADER = (
    "conductor,circuit,label,frequency_Hz,current_A,angle_deg,x_m,y_m,z_m,"
    "diameter_m,width_m,thickness_m,turn_deg"
)
NEEDED = HEADER.rpartition(",diameter")[0]

PAIR = f"""{NEEDED}
go,lamp,L1,50,10,0,0,0,0
go,lamp,L1,50,10,0,5,0,0
back,lamp,N,50,10,180,0,0.1,0
back,lamp,N,50,10,180,5,0.1,0
"""


def layout_of(text: str) -> Layout:
    return schedule_layout(text.encode(), "currents.csv")


def told(text: str | bytes) -> str:
    data = text if isinstance(text, bytes) else text.encode()
    with pytest.raises(UserError) as caught:
        schedule_layout(data, "currents.csv")
    return str(caught.value)


def flowing(layout: Layout) -> dict[tuple[str, float], complex]:
    """Phasor of each conductor by its schedule name and frequency. [A]"""
    phasors = case_phasors(layout, layout.cases[0])
    made = conductors(layout)
    currents = conductor_currents(phasors, made)
    names = {run.id: run.name for run in layout.runs}
    return {
        (names[conductor.item], component.frequency): complex(current)
        for component, row in zip(phasors.components, currents, strict=True)
        for conductor, current in zip(made, row, strict=True)
        if current != 0
    }


def test_every_current_flows_as_stated() -> None:
    rows = [NEEDED]
    stated: dict[tuple[str, float], complex] = {}
    chance = random.Random(3)
    for number in range(40):
        circuit, label = f"c{number % 3}", f"L{number % 4}"
        frequencies = chance.sample([0, 50, 150, 250, 16.7, 60, 300], 3)
        for frequency in frequencies:
            amperes = round(chance.uniform(1, 900), 3)
            angle = (
                chance.choice([0, 180]) if frequency == 0 else chance.uniform(-400, 400)
            )
            stated[f"w{number}", frequency] = cmath.rect(amperes, math.radians(angle))
            for x in (0, 4):
                rows.append(
                    f"w{number},{circuit},{label},{frequency},{amperes},{angle!r},"
                    f"{x},{number},1"
                )
    found = flowing(layout_of("\n".join(rows)))
    assert found.keys() == stated.keys()
    for key, current in stated.items():
        # An offset is computed from angles of some hundred degrees.
        assert found[key] == pytest.approx(current, rel=1e-12)


def test_conductors_of_one_label_keep_their_own_currents() -> None:
    layout = layout_of(PAIR.replace(",N,50,10,180", ",L1,50,7,90"))
    (circuit,) = layout.circuits
    assert isinstance(circuit.demand, DirectCurrents)
    assert [c.label for c in circuit.demand.currents] == ["L1 (go)", "L1 (back)"]
    assert flowing(layout)["go", 50] == pytest.approx(10)
    assert flowing(layout)["back", 50] == pytest.approx(7j, abs=1e-14)


def test_a_label_that_looks_made_is_not_taken_twice() -> None:
    text = "\n".join(
        [NEEDED]
        + [
            f"{name},c,{label},50,{amperes},0,{x},{y},0"
            for y, (name, label, amperes) in enumerate(
                [("a", "L1", 1), ("b", "L1", 2), ("d", "L1 (a)", 3)]
                + [(f"{'long' * 20} {i}", "L1", 4 + i) for i in range(3)]
            )
            for x in (0, 1)
        ]
    )
    layout = layout_of(text)
    values = sorted(abs(current) for current in flowing(layout).values())
    assert values == pytest.approx([1, 2, 3, 4, 5, 6])
    assert decode(encode(layout), "x") == layout


def test_zero_hertz_has_a_sign() -> None:
    text = PAIR.replace(",50,10,", ",0,10,")
    found = flowing(layout_of(text))
    assert found == {("go", 0.0): 10 + 0j, ("back", 0.0): -10 + 0j}
    assert layout_of(text).circuits[0].base_frequency == 0
    minus = text.replace(",180,", ",-180,")
    assert flowing(layout_of(minus)) == found


def test_harmonics_hold_their_angle_to_the_fundamental() -> None:
    again = PAIR.partition("\n")[2].replace(",50,10,", ",150,3,")
    layout = layout_of(PAIR + again)
    phasors = case_phasors(layout, layout.cases[0])
    assert {(c.frequency, c.base, c.group) for c in phasors.components} == {
        (50.0, 50.0, ""),
        (150.0, 50.0, ""),
    }
    assert phasors.notes == ()
    assert flowing(layout)["back", 150] == pytest.approx(-3)


def test_a_harmonic_without_a_fundamental_adds_with_the_others() -> None:
    text = PAIR + "x,drive,L1,150,2,35,0,1,0\nx,drive,L1,150,2,35,1,1,0\n"
    layout = layout_of(text)
    assert {c.base_frequency for c in layout.circuits} == {50}
    assert flowing(layout)["x", 150] == pytest.approx(cmath.rect(2, math.radians(35)))
    assert len(case_phasors(layout, layout.cases[0]).components) == 2


def test_frequencies_that_are_no_multiples_have_a_base_of_their_own() -> None:
    text = NEEDED + "".join(
        f"\nw,c,L1,{f},1,0,{x},0,0" for f in (60, 50, 100, 0) for x in (0, 1)
    )
    layout = layout_of(text)
    bases = {c.id: c.base_frequency for c in layout.circuits}
    assert bases == {"c": 60, "c 50 Hz": 50, "c DC": 0}
    assert layout.settings.frequency == 50
    assert flowing(layout).keys() == {("w", f) for f in (0, 50, 60, 100)}


def test_a_large_circuit_is_several_items_that_add() -> None:
    text = NEEDED + "".join(
        f"\nw{n},c,L{n},{f},1,0,{x},{n},0"
        for n in range(150)
        for f in (50, 100, 150, 200, 250, 300)
        for x in (0, 1)
    )
    layout = layout_of(text)
    assert len(layout.circuits) == 2
    assert len(case_phasors(layout, layout.cases[0]).components) == 6
    assert len(flowing(layout)) == 900
    assert decode(encode(layout), "x") == layout


def test_shapes_are_as_stated_and_a_missing_one_is_the_default() -> None:
    text = f"""{HEADER}
a,c,L1,50,1,0,0,0,0,0.012,,,
a,c,L1,50,1,0,1,0,0,0.012,,,
b,c,L2,50,1,0,0,1,0,,0.1,0.01,90
b,c,L2,50,1,0,1,1,0,,0.1,0.01,90
d,c,L3,50,1,0,0,2,0,,,,
d,c,L3,50,1,0,1,2,0
"""
    shapes = []
    for run in layout_of(text).runs:
        assert isinstance(run.section, FreeSection)
        shapes.append(run.section.slots[0].shape)
    assert shapes == [
        Round(diameter=0.012),
        Bar(width=0.1, thickness=0.01, turn=90),
        Round(),
    ]
    origins = [[o.field for o in run.origins] for run in layout_of(text).runs]
    assert origins == [["route", "section"], ["route", "section"], ["route"]]


def test_columns_may_stand_in_any_order_and_empty_columns_behind() -> None:
    names = NEEDED.split(",")
    order = list(reversed(range(9)))
    lines = [
        ";".join([line.split(",")[i] for i in order]) + ";;"
        for line in PAIR.splitlines()
    ]
    assert names[-1] == "z_m"
    layout = layout_of("\n".join(lines))
    assert (layout.runs, layout.circuits) == (
        layout_of(PAIR).runs,
        layout_of(PAIR).circuits,
    )


def spreadsheet(text: str) -> str:
    return text.replace(",", ";").replace(".", ",")


FORMS = {
    "semicolons and decimal commas": spreadsheet(PAIR).encode(),
    "quoted decimal commas": PAIR.replace("0.1", '"0,1"').encode(),
    "byte order mark": PAIR.encode("utf-8-sig"),
    "UTF-16": PAIR.encode("utf-16"),
    "UTF-16, big end first": b"\xfe\xff" + PAIR.encode("utf-16-be"),
    "Windows line ends": PAIR.replace("\n", "\r\n").encode(),
    "old line ends": PAIR.replace("\n", "\r").encode(),
    "blank lines": ("\n\n" + PAIR.replace("\n", "\n\n,,,,\n \n")).encode(),
    "quotes": PAIR.replace("lamp", '"lamp"').replace("go", '"go"').encode(),
    "spaces": PAIR.replace(",", " , ").encode(),
    "no last line end": PAIR.rstrip().encode(),
    "exponents": PAIR.replace(",10,", ",1e+1,").replace("0.1", "1E-1").encode(),
    "minus sign": PAIR.replace(",180,", ",\u2212180,").encode(),
    "bare point": PAIR.replace("0.1", ".1").replace(",5,", ",5.,").encode(),
}


@pytest.mark.parametrize("form", FORMS)
def test_a_schedule_may_be_written_as_programs_write_it(form: str) -> None:
    data = FORMS[form]
    layout = schedule_layout(data, "currents.csv")
    plain = layout_of(PAIR)
    assert [r.route for r in layout.runs] == [r.route for r in plain.runs]
    currents, stated = flowing(layout), flowing(plain)
    assert currents.keys() == stated.keys()
    for key, current in stated.items():
        assert currents[key] == pytest.approx(current, abs=1e-12)
    assert layout.documents[0].sha256 == hashlib.sha256(data).hexdigest()


def test_names_with_separators_and_line_ends_may_be_quoted() -> None:
    text = PAIR.replace("go,", '"go, then\nleft",')
    layout = layout_of(text)
    assert layout.runs[0].name == "go, then\nleft"
    broken = text.replace("back,lamp,N,50,10,180,5", "back,lamp,N,50,ten,180,5")
    assert "line 7: current_A: expected a number" in told(broken)


def test_foreign_names_get_readable_ids() -> None:
    layout = layout_of(PAIR.replace("lamp", "Höhe / Ω").replace("go", "磁"))
    assert layout.circuits[0].id == "Hohe"
    assert layout.circuits[0].name == "Höhe / Ω"
    assert [run.id for run in layout.runs] == ["item", "back"]


def test_empty_circuit_and_label_get_a_name() -> None:
    layout = layout_of(PAIR.replace("lamp,L1", ",").replace("lamp,N", ","))
    assert layout.circuits[0].name == "circuit"
    assert flowing(layout)["back", 50] == pytest.approx(-10)


# Joints


def square(first: float = 0.0) -> list[tuple[float, float]]:
    return [(first, 0), (1, 0), (1, 1), (0, 1), (0, 0)]


def loop_text(vertices: list[tuple[float, float]], name: str = "coil") -> str:
    rows = [f"{name},turn,L1,50,1,0,{x!r},{y!r},0" for x, y in vertices]
    return "\n".join([NEEDED, *rows])


def test_a_loop_closes_on_itself() -> None:
    layout = layout_of(loop_text(square()))
    (joint,) = layout.joints
    assert [(end.item, end.end) for end in joint.ends] == [
        ("coil", "start"),
        ("coil", "end"),
    ]
    (node,) = nodes(layout)
    assert sum(load.share for load in node.inflow) == 0
    assert len(conductors(layout)) == 1


@pytest.mark.parametrize(("gap", "joined"), [(0.9e-6, True), (3e-6, False)])
def test_ends_within_a_micrometre_are_joined(gap: float, joined: bool) -> None:
    layout = layout_of(loop_text(square(gap)))
    assert bool(layout.joints) is joined
    kinds = Counter(node.kind for node in nodes(layout))
    assert kinds == ({"joint": 1} if joined else {"free end": 2})
    # Neither a link of less than a micrometre nor a closing link is made up.
    assert {conductor.role for conductor in conductors(layout)} == {"run"}


def test_conductors_that_meet_are_joined_and_close() -> None:
    star = "\n".join(
        f"{name},c,{name},50,10,{angle},{x},{y},{z}"
        for name, angle, end in (
            ("L1", 0, (1, 0, 0)),
            ("L2", -120, (0, 1, 0)),
            ("L3", 120, (0, 0, 1)),
        )
        for x, y, z in (end, (0, 0, 0))
    )
    layout = layout_of(f"{NEEDED}\n{star}")
    (joint,) = layout.joints
    assert {(end.item, end.end) for end in joint.ends} == {
        ("L1", "end"),
        ("L2", "end"),
        ("L3", "end"),
    }
    assert joint.at == (0, 0, 0)
    phasors = case_phasors(layout, layout.cases[0])
    (node,) = [node for node in nodes(layout) if node.kind == "joint"]
    sums = [load_current(phasors, node.inflow)]
    assert abs(sums[0]).max() < 1e-12


def test_a_conductor_of_many_vertices_is_one_current_path() -> None:
    count = 1800
    corners = [
        (math.cos(math.tau * i / count), math.sin(math.tau * i / count))
        for i in range(count)
    ]
    layout = layout_of(loop_text([*corners, corners[0]]))
    assert [len(run.route) for run in layout.runs] == [500, 500, 500, 304]
    assert len(layout.joints) == 4
    assert {conductor.role for conductor in conductors(layout)} == {"run"}
    for one, other in itertools.pairwise(layout.runs):
        assert one.route[-1] == other.route[0]


def test_a_straight_line_of_200_km_can_be_stated() -> None:
    text = f"{NEEDED}\nw,c,L1,50,1,0,0,0,-100000\nw,c,L1,50,1,0,0,0,100000\n"
    assert layout_of(text).runs[0].route == ((0, 0, -1e5), (0, 0, 1e5))


# Files and faults


def test_a_schedule_becomes_a_layout_file_and_comes_back(tmp_path: Path) -> None:
    source = tmp_path / "lamp.csv"
    source.write_text(PAIR, encoding="utf-8")
    layout = read_schedule(source)
    assert decode(encode(layout), "lamp.json") == layout
    assert layout.title.project == "lamp"
    assert layout.documents[0].file_name == "lamp.csv"
    assert layout.runs[0].origins[0].page == "lines 2 to 3"


def test_a_file_that_is_not_there_is_told(tmp_path: Path) -> None:
    with pytest.raises(UserError, match=r"gone\.csv was not read: there is no such"):
        read_schedule(tmp_path / "gone.csv")
    with pytest.raises(UserError, match="it is not a file"):
        read_schedule(tmp_path)
    with pytest.raises(UserError, match="was not read"):
        read_schedule("a\0b")


def changed(line: int, old: str, new: str, text: str = PAIR) -> str:
    lines = text.splitlines()
    assert old in lines[line - 1]
    lines[line - 1] = lines[line - 1].replace(old, new, 1)
    return "\n".join(lines)


AGAIN = "go,lamp,L1,150,1,0,0,0,0\ngo,lamp,L1,150,1,0,5,0,0\n"
SIZED = f"""{HEADER}
a,c,L1,50,1,0,0,0,0,0.012,,,
a,c,L1,50,1,0,1,0,0,0.012,,,
"""

FAULTS = {
    "empty": ("", ["it is empty", NEEDED]),
    "only blanks": ("\n , ,\n\t\n", ["it is empty"]),
    "header only": (NEEDED, ["there is no row below the header"]),
    "other header": ("name,x,y\n", ["line 1", '"name" is not a column']),
    "header lacks": (PAIR.replace(",z_m", ""), ["line 1", "lacks z_m"]),
    "column twice": (PAIR.replace("z_m", "x_m"), ["column x_m comes twice"]),
    "wrong unit": (PAIR.replace("x_m", "x_mm"), ['line 1: "x_mm" is not a column']),
    "tabs": (PAIR.replace(",", "\t"), ["line 1"]),
    "no number": (changed(3, ",5,", ",abc,"), ['x_m: expected a number, got "abc"']),
    "nothing": (changed(3, ",5,", ",,"), ["line 3: x_m", "got nothing"]),
    "nan": (changed(3, ",5,", ",nan,"), ["line 3: x_m: expected a number"]),
    "infinite": (changed(3, ",5,", ",1e999,"), ["line 3: x_m", "-100000 to 100000"]),
    "underscore": (changed(3, ",5,", ",1_0,"), ["line 3: x_m: expected a number"]),
    "unit in a cell": (changed(3, ",5,", ",5 m,"), ["line 3: x_m: expected a number"]),
    "thousands": (changed(3, ",5,", ',"1,000.5",'), ["line 3: x_m: expected a number"]),
    "two marks": (changed(3, ",5,", ',"5,5",'), ["in line 4 and", "in line 3"]),
    "unquoted comma": (changed(3, ",5,", ",5,5,"), ["line 3: expected 9", "got 10"]),
    "short row": (changed(3, ",5,0,0", ",5"), ["line 3: expected 9 cells", "got 7"]),
    "too far": (changed(3, ",5,", ",100001,"), ["line 3: x_m", "-100000 to 100000"]),
    "negative current": (changed(2, ",10,", ",-10,"), ["line 2: current_A: expected"]),
    "negative frequency": (changed(2, "50", "-50"), ["line 2: frequency_Hz: expected"]),
    "tiny frequency": (changed(2, "50", "1e-8"), ["line 2: frequency_Hz", "0.000001"]),
    "angle of DC": (
        PAIR.replace(",50,10,180", ",0,10,90"),
        ["line 4: angle_deg: at 0 Hz", "line 5: angle_deg: at 0 Hz"],
    ),
    "no name": (changed(3, "go", ""), ["line 3: conductor: a name is missing"]),
    "long label": (PAIR.replace("L1", "L" * 41), ["line 2: label: at most 40"]),
    "one vertex": (
        f"{NEEDED}\ngo,lamp,L1,50,10,0,0,0,0",
        ['line 2: conductor "go" has one vertex only'],
    ),
    "same vertex": (changed(3, ",5,", ",0,"), ["vertex is the same as in line 2"]),
    "two currents": (changed(3, ",10,", ",11,"), ["current_A differs from line 2"]),
    "two angles": (changed(3, ",0,5", ",1,5"), ["angle_deg differs from line 2"]),
    "two circuits": (changed(3, "lamp", "x"), ["line 3: circuit differs from line 2"]),
    "interleaved": (
        "\n".join(PAIR.splitlines()[i] for i in (0, 1, 3, 2, 4)),
        ['line 4: conductor "go" comes again at 50 Hz (first in line 2)'],
    ),
    "other vertices": (
        PAIR + AGAIN.replace(",5,", ",6,"),
        ['line 7: conductor "go" has another vertex here than in line 3'],
    ),
    "fewer vertices": (
        PAIR.replace("go,lamp,L1,50,10,0,5,0,0", "go,lamp,L1,50,10,0,5,0,0\n"
                     "go,lamp,L1,50,10,0,6,0,0") + AGAIN,
        ['lines 7 to 8: conductor "go" has 2 vertices here, but 3 in lines 2 to 4'],
    ),
    "round bar": (
        changed(2, ",,,", ",0.1,0.01,", SIZED),
        ["line 2: a conductor is round (diameter_m) or a bar"],
    ),
    "half a bar": (changed(2, "0.012,", ",0.1", SIZED), ["line 2: a bar needs both"]),
    "turned wire": (changed(2, ",,,", ",,,45", SIZED), ["turn_deg: only a bar"]),
    "no width": (changed(2, "0.012", "0", SIZED), ["line 2: diameter_m: expected"]),
    "two sizes": (changed(3, "0.012", "0.013", SIZED), ["size differs from line 2"]),
    "open quotes": (changed(5, "back", '"back'), ["line 5:"]),
    "text behind quotes": (changed(5, "back", '"ba"ck'), ["line 5:"]),
}  # fmt: skip


@pytest.mark.parametrize("name", FAULTS)
def test_a_fault_is_told_with_its_line(name: str) -> None:
    text, parts = FAULTS[name]
    sentence = told(text)
    assert sentence.startswith("currents.csv was not read")
    assert sentence.endswith(".")
    for part in parts:
        assert part in sentence


def test_all_faults_are_told_at_once() -> None:
    text = changed(2, ",10,", ",x,", changed(5, "0.1", "y"))
    sentence = told(text)
    assert "line 2: current_A" in sentence
    assert "line 5: y_m" in sentence


def test_other_encodings_are_told() -> None:
    assert "line 3: it is not UTF-8 text" in told(
        f"{NEEDED}\n\nhöhe,c,L1,50,1,0,0,0,0".encode("latin-1")
    )
    assert "it is not" in told(b"\xff\xfe" + b"a")


def test_too_many_rows_are_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("engine.exchange.schedule_text.MAX_ROWS", 3)
    assert "line 5: more than 3 rows" in told(PAIR)
    monkeypatch.setattr("engine.exchange.schedule_text.MAX_BYTES", 30)
    assert "it is larger than" in told(PAIR)


def test_a_bar_of_too_many_vertices_is_refused() -> None:
    rows = [f"a,c,L1,50,1,0,{i},0,0,,0.1,0.01," for i in range(501)]
    assert "is a bar of more than 500 vertices" in told("\n".join([HEADER, *rows]))


def test_limits_are_those_of_the_layout() -> None:
    def most(kind: type, name: str) -> int | None:
        described = inspect.type_info(kind)
        assert isinstance(described, inspect.StructType)
        (field,) = [f for f in described.fields if f.name == name]
        assert isinstance(field.type, inspect.VarTupleType)
        return field.type.max_length

    assert most(Run, "route") == schedule_conductors.MOST_VERTICES
    assert most(DirectCurrents, "currents") == schedule._MOST_CURRENTS
    assert most(Circuit, "spectrum") == schedule._MOST_LINES
    assert most(Layout, "runs") == schedule._MOST_RUNS
    assert most(Layout, "circuits") == schedule._MOST_CIRCUITS
    assert most(Joint, "ends") == schedule._MOST_ENDS


def test_a_thin_wire_may_bend_as_sharply_as_it_likes() -> None:
    corners = [(0, 0, 0), (4, 0, 0), (0, 0.5, 0.2), (3, 0.4, 1), (0, 0, 0)]
    rows = [f"a,c,L1,50,7,30,{x},{y},{z}" for x, y, z in corners]
    layout = layout_of("\n".join([NEEDED, *rows]))
    made = conductors(layout)
    assert {c.role for c in made} == {"run"}
    drawn = [tuple(v) for c in made for v in c.path[:-1].tolist()]
    assert drawn == corners[:-1]
    assert set(flowing(layout).values()) == {cmath.rect(7, math.radians(30))}
    phasors = case_phasors(layout, layout.cases[0])
    for node in nodes(layout):
        assert abs(load_current(phasors, node.inflow)).max() < 1e-12


def test_turning_straight_back_and_sharp_bars_name_their_line() -> None:
    twice = PAIR.replace("back,", "go,lamp,L1,50,10,0,0,0,0\nback,", 1)
    assert "line 4" in told(twice)
    assert "goes straight back from line 3" in told(twice)
    bar = "\n".join(
        f"a,c,L1,50,1,0,{x},{y},0,,0.1,0.01," for x, y in ((0, 0), (4, 0), (0, 1))
    )
    assert 'line 3: the bar "a" bends by 166°' in told(f"{HEADER}\n{bar}")
