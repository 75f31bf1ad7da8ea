"""Preferences: remembered, and never a reason not to start."""

from __future__ import annotations

import msgspec

from app import preferences
from app.preferences import Preferences


def test_what_is_saved_comes_back(tmp_path):
    path = tmp_path / "a" / "preferences.json"
    wanted = Preferences(
        frequency=60, flux_density_unit="mG", theme="dark", chosen=True
    )
    preferences.save(wanted, path)
    assert preferences.load(path) == wanted


def test_a_damaged_file_gives_first_choices(tmp_path):
    path = tmp_path / "preferences.json"
    for damage in (b"", b"{", b'{"frequency": 55}', b"\xff\xfe"):
        path.write_bytes(damage)
        assert preferences.load(path).frequency in (50, 60)
        assert not preferences.load(path).chosen


def test_a_field_of_a_newer_version_is_ignored(tmp_path):
    path = tmp_path / "preferences.json"
    path.write_bytes(msgspec.json.encode({"frequency": 60, "later": 1}))
    assert preferences.load(path).frequency == 60


def test_recent_files_are_few_newest_first_and_each_once(tmp_path):
    value = Preferences()
    for number in [*range(12), 5]:
        value = value.with_recent(tmp_path / f"{number}.json")
    assert len(value.recent) == preferences.MOST_RECENT
    assert value.recent[0].endswith("5.json")
    assert len(set(value.recent)) == len(value.recent)
