"""The published numbers that the program prints in its validation annex.

Source, tolerance and its reason stand with each check in `engine.validation`.
"""

from __future__ import annotations

import pytest

from engine.validation import Check, checks, outcome, table


@pytest.mark.parametrize("check", checks(), ids=lambda check: check.id)
def test_engine_reproduces_the_published_value(check: Check) -> None:
    result = outcome(check)
    assert result.agrees, (
        f"{check.case}: published {check.published} {check.unit} ({check.source}), "
        f"computed {result.value} {check.unit}, tolerance {check.tolerance}: "
        f"{check.reason}"
    )


def test_every_check_has_an_id_of_its_own_a_source_and_a_reason() -> None:
    found = checks()
    assert len({check.id for check in found}) == len(found)
    assert all(check.source and check.case and check.reason for check in found)


def test_no_tolerance_hides_a_factor_of_root_two() -> None:
    # Printed to one figure; exact components and nearer points stand beside them.
    coarse = {"A1 net", "B2 at 100 m"}
    for check in checks():
        if check.id not in coarse and check.published != 0:
            assert check.tolerance < 0.29 * abs(check.published), check.id


def test_table_has_a_line_for_every_check_and_none_disagrees() -> None:
    lines = table().splitlines()
    assert len(lines) == len(checks()) + 1
    assert not any("  NO  " in line for line in lines)
