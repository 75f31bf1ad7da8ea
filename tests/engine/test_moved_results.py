"""Results that moved: by how much, where that has a meaning."""

from __future__ import annotations

import pytest

from engine.items import IssuedResult
from engine.revisions import moved_results


def result(value, kind):
    return IssuedResult(place="desk", case="all", level="limit", kind=kind, value=value)


def test_a_value_that_moved_tells_its_share():
    (moved,) = moved_results([result(2e-6, "AC")], [result(2.5e-6, "AC")])
    assert moved.relative == pytest.approx(0.25)


def test_between_alternating_and_direct_field_there_is_no_share():
    (moved,) = moved_results([result(90e-6, "DC")], [result(5e-6, "AC")])
    assert moved.relative is None
