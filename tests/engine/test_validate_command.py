"""`validate` as a user runs it: what it prints, and how it ends."""

from __future__ import annotations

import json
from dataclasses import replace

import pytest

from engine.__main__ import main
from engine.commands import validated
from engine.validation import checks


def test_validate_prints_every_check_with_its_source_and_ends_with_0(capsys):
    assert main(["validate"]) == 0
    text = capsys.readouterr().out
    for check in checks():
        assert check.id in text
        assert check.source in text
    assert f"{len(checks())} of {len(checks())} values agree" in text
    assert "sandwich" in text.partition("formation  ")[2]


def test_validate_as_json_holds_values_and_deviations(capsys):
    assert main(["validate", "--json"]) == 0
    answer = json.loads(capsys.readouterr().out)
    assert answer["agree"] is True
    assert len(answer["checks"]) == len(checks())
    for found in answer["checks"]:
        assert found["deviation"] == pytest.approx(
            found["computed"] - found["published"], abs=1e-15
        )
        assert found["agrees"]
        assert found["source"]
    assert answer["near_field"]["rows"]


def test_validate_ends_with_1_where_a_check_does_not_agree(capsys, monkeypatch):
    first = checks()[0]
    wrong = replace(first, published=2 * first.published)
    monkeypatch.setattr(validated, "checks", lambda: (wrong,))
    assert main(["validate"]) == 1
    assert "  NO  " in capsys.readouterr().out
