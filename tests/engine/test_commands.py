"""The commands as a user runs them: as processes, by their output and exit codes."""

from __future__ import annotations

import json
import math
import subprocess
import sys
from pathlib import Path
from xml.etree import ElementTree

import pytest
from pypdf import PdfReader

ROOT = Path(__file__).parents[2]
SAMPLES = ROOT / "sample_layouts"
SMALL = SAMPLES / "small-switch-room.json"

HEADER = "conductor,circuit,label,frequency_Hz,current_A,angle_deg,x_m,y_m,z_m\n"


def run(*arguments: object, code: int = 0) -> str:
    done = subprocess.run(
        [sys.executable, "-W", "error", "-m", "engine", *map(str, arguments)],
        cwd=ROOT,
        capture_output=True,
        encoding="utf-8",
        timeout=300,
        check=False,
    )
    assert done.returncode == code, done.stderr + done.stdout
    assert "Traceback" not in done.stderr
    return done.stdout if code in (0, 1, 3) else done.stderr


def long_wire(path: Path, current: float, frequency: float = 50) -> Path:
    rows = [f"W,C,L1,{frequency},{current},0,0,0,{z}" for z in (-1e5, 1e5)]
    path.write_text(HEADER + "\n".join(rows) + "\n", encoding="utf-8")
    return path


def test_field_of_a_long_wire_obeys_ampere(tmp_path):
    # Ampère's law: µ0 I / 2πr = 0.2 µT at 1 m for 1 A; ends at 100 km.
    source = long_wire(tmp_path / "wire.csv", 1.0)
    answer = json.loads(run("field", source, "--at=1,0,0", "--at=0,-2,5", "--json"))
    near, far = answer["points"]
    assert near["at_m"] == [1, 0, 0]
    assert near["assessable"] is True
    assert near["resultant_T"] == pytest.approx(2e-7, rel=1e-9)
    assert near["peak_T"] == pytest.approx(2e-7 * math.sqrt(2), rel=1e-9)
    assert far["resultant_T"] == pytest.approx(1e-7, rel=1e-9)
    part = near["by_frequency"]["50"]
    assert part["semi_major_T"] == pytest.approx(2e-7, rel=1e-9)
    assert part["semi_minor_T"] == pytest.approx(0, abs=1e-15)
    assert part["components_T"][1][0] == pytest.approx(2e-7, rel=1e-9)


def test_field_inside_a_conductor_has_no_numbers(tmp_path):
    source = long_wire(tmp_path / "wire.csv", 1.0)
    (point,) = json.loads(run("field", source, "--at=0.001,0,0", "--json"))["points"]
    assert point["assessable"] is False
    assert point["resultant_T"] is None
    assert point["by_frequency"]["50"] is None or (
        point["by_frequency"]["50"]["resultant_T"] is None
    )


def test_direct_current_stands_outside_the_ac_total(tmp_path):
    source = long_wire(tmp_path / "wire.csv", 10.0, frequency=0)
    (point,) = json.loads(run("field", source, "--at=1,0,0", "--json"))["points"]
    assert point["resultant_T"] == 0
    assert point["by_frequency"]["0"]["resultant_T"] == pytest.approx(2e-6, rel=1e-9)


def test_field_as_text_in_the_users_unit(tmp_path):
    source = long_wire(tmp_path / "wire.csv", 1.0)
    assert "resultant 2.0000 mG" in run("field", source, "--at=1,0,0", "--unit", "mG")
    assert "0.20000 µT" in run("field", source, "--at=1,0,0")


@pytest.mark.parametrize("at", ["1,2", "a,b,c", "nan,0,0", "1,2,3,4"])
def test_a_wrong_point_is_explained(at):
    message = run("field", SMALL, f"--at={at}", code=2)
    assert "give three numbers in metres" in message


def test_a_missing_file_is_explained(tmp_path):
    assert "no such file" in run("assess", tmp_path / "none.json", code=2)


def test_an_unknown_load_case_is_explained():
    message = run("assess", SMALL, "--case", "Summer", code=2)
    assert 'no load case "Summer"' in message


def test_an_unknown_unit_is_explained():
    assert "unknown unit" in run("assess", SMALL, "--unit", "tesla", code=2)


def test_schedule_becomes_a_layout_with_the_same_field(tmp_path):
    source = long_wire(tmp_path / "wire.csv", 3.0)
    out = tmp_path / "wire.json"
    assert str(out) in run("schedule", source, out)
    a = json.loads(run("field", source, "--at=2,1,0", "--json"))
    b = json.loads(run("field", out, "--at=2,1,0", "--json"))
    assert a == b


def test_assess_says_the_same_in_text_and_json():
    text = run("assess", SMALL)
    plain = json.loads(run("assess", SMALL, "--json"))
    assert text == run("assess", SMALL, "--unit", "µT")
    (worst, *_) = plain["worst"]
    assert worst["state"] == "below"
    assert f": {worst['state']}\n" in text
    assert plain["remarks"] == []
    assert "local regulation" in text


@pytest.mark.parametrize("name", ["office-over-switch-room", "imaging-corridor"])
def test_assess_ends_with_one_where_a_comparison_is_above(name):
    run("assess", SAMPLES / f"{name}.json", code=1)


def test_report_and_maps_are_written(tmp_path):
    run("report", SMALL, tmp_path / "r.pdf")
    assert (tmp_path / "r.pdf").read_bytes().startswith(b"%PDF")
    run("map", SMALL, "--height", 1, tmp_path / "m.png")
    assert (tmp_path / "m.png").read_bytes().startswith(b"\x89PNG")
    run("map", SMALL, "--height", 1, tmp_path / "m.svg")
    assert ElementTree.parse(tmp_path / "m.svg").getroot().tag.endswith("svg")
    run("map", SMALL, "--height", 1, tmp_path / "m.csv")
    head, first = (tmp_path / "m.csv").read_text(encoding="utf-8").splitlines()[:2]
    assert head.startswith("x [m],y [m],z [m],B RMS resultant [µT]")
    assert float(first.split(",")[2]) == 1


def test_a_variant_is_reported_on_the_paper_that_is_asked_for(tmp_path):
    layout, note = SAMPLES / "imaging-corridor.json", tmp_path / "n.pdf"
    chosen = ("--note", "--variant", "Second bond removed")
    lying = ("--paper", "A3", "--orientation", "portrait")
    run("report", layout, note, *chosen, *lying)
    page = PdfReader(note).pages[0]
    assert "Second bond removed" in page.extract_text()
    size = float(page.mediabox.width), float(page.mediabox.height)
    # ISO 216: 297 mm by 420 mm.
    assert size == pytest.approx((297 / 25.4 * 72, 420 / 25.4 * 72), abs=0.1)
    message = run("report", layout, note, "--note", "--variant", "None", code=2)
    assert "no variant “None”" in message


def test_a_map_of_another_kind_is_refused(tmp_path):
    message = run("map", SMALL, "--height", 1, tmp_path / "m.bmp", code=2)
    assert ".png, .svg or .csv" in message


def test_a_report_that_cannot_be_written_says_so(tmp_path):
    message = run("report", SMALL, tmp_path / "no folder" / "r.pdf", code=2)
    assert "r.pdf" in message


def test_assess_prints_one_unit_only():
    text = run("assess", SAMPLES / "imaging-corridor.json", code=1)
    assert "uncertainty U of" in text
    assert " mG" not in text
    text = run("assess", SAMPLES / "imaging-corridor.json", "--unit", "mG", code=1)
    assert "µT" not in text


def test_assess_says_what_direct_current_comes_to_on_its_own():
    name = SAMPLES / "battery-laboratory.json"
    text = run("assess", name, code=1)
    assert "    DC on its own: ratio " in text
    told = json.loads(run("assess", name, "--json", code=1))
    both = [c for c in told["worst"] if c["other_kind_ratio"] is not None]
    assert both
    assert all(c["other_kind_ratio"] <= c["ratio"] for c in both)


def test_frequencies_that_differ_little_are_told_apart(tmp_path):
    rows = [
        f"W{k},C,L1,{f},1,0,{k},0,{z}"
        for k, f in enumerate((100_000.25, 100_000.5))
        for z in (-10, 10)
    ]
    source = tmp_path / "near.csv"
    source.write_text(HEADER + "\n".join(rows) + "\n", encoding="utf-8")
    (point,) = json.loads(run("field", source, "--at=5,0,0", "--json"))["points"]
    assert list(point["by_frequency"]) == ["100000.25", "100000.5"]


def test_points_beyond_reach_are_told(tmp_path):
    for point in ("1e300,0,0", "nan,0,0", "0,0,inf"):
        assert "is no point" in run("field", SMALL, f"--at={point}", code=2)


def test_values_of_a_layout_that_is_no_real_room_say_so(tmp_path):
    raw = json.loads(SMALL.read_text(encoding="utf-8"))
    section = raw["layout"]["runs"][0]["section"]
    section["circuits"].append({"circuit": "forgotten"})
    source = tmp_path / "open.json"
    source.write_text(json.dumps(raw), encoding="utf-8")
    for command in (
        ("field", source, "--at=1,1,1", "--json"),
        ("map", source, "--height", "1", tmp_path / "open.csv", "--json"),
    ):
        done = subprocess.run(
            [sys.executable, "-m", "engine", *map(str, command)],
            cwd=ROOT, capture_output=True, encoding="utf-8", check=True,
        )  # fmt: skip
        assert "not those of a real room" in done.stderr
        assert "forgotten" in done.stderr
        assert json.loads(done.stdout)
