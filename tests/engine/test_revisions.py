"""Issued revisions: what they freeze, and what moved since."""

from __future__ import annotations

import json
from pathlib import Path

import pytest
from msgspec.structs import replace

from engine.assessment import assess
from engine.circuits import BalancedCurrent, Circuit
from engine.commands.revisions import (
    as_json,
    as_text,
    changes_between,
    freeze,
    issue_revision,
    names_of,
    opening,
    recomputed_text,
)
from engine.errors import ComputationCancelled, UserError
from engine.items import SourceDocument, ValueOrigin
from engine.layout import Layout
from engine.layout_file import read, write
from engine.places import Receptor
from engine.report.choices import Choices
from engine.revisions import (
    as_issued,
    changes_since,
    issued,
    issued_results,
    layout_digest,
    moved_results,
    recomputed,
    results_digest,
)
from engine.runs import CircuitShare, Flat, Run


def layout(rms=400.0):
    return Layout(
        circuits=(
            Circuit(
                id="feeder", name="Feeder", demand=BalancedCurrent(rms=rms), voltage=400
            ),
        ),
        runs=(
            Run(
                id="bars",
                name="Bars",
                route=((0.5, 1.5, 2.5), (3.5, 1.5, 2.5)),
                section=Flat(circuits=(CircuitShare(circuit="feeder"),)),
            ),
        ),
        receptors=(Receptor(id="desk", name="Desk", at=(1, 1, 1)),),
    )


def made(rms=400.0, revision="A"):
    drawn = layout(rms)
    return issued(drawn, assess(drawn), revision, "2024-05-01", note="For tender")


def test_issuing_sets_the_title_and_ties_layout_and_results():
    found = made()
    (entry,) = found.revisions
    assert (found.title.revision, found.title.date) == ("A", "2024-05-01")
    assert entry.layout_digest == layout_digest(found)
    assert entry.results_digest == results_digest(issued_results(assess(found)))
    assert as_issued(found, entry)


def test_an_edit_shows_in_the_digest_and_a_further_revision_does_not():
    found = made()
    entry = found.revisions[0]
    assert not as_issued(
        replace(found, title=replace(found.title, client="Another")), entry
    )
    assert layout_digest(replace(found, revisions=())) == layout_digest(found)


def test_a_revision_is_issued_once():
    found = made()
    with pytest.raises(UserError, match="Revision A was not issued: it was issued"):
        issued(found, assess(found), "A", "2024-06-01")
    again = issued(found, assess(found), "B", "2024-06-01")
    assert [r.revision for r in again.revisions] == ["A", "B"]
    assert len({r.id for r in again.revisions}) == 2


@pytest.mark.parametrize(("revision", "date"), [("", "2024"), (" ", "2024"), ("A", "")])
def test_a_revision_needs_a_name_and_a_date(revision, date):
    drawn = layout()
    with pytest.raises(UserError, match="was not issued: it has no"):
        issued(drawn, assess(drawn), revision, date)


def test_results_of_another_layout_are_refused():
    with pytest.raises(ValueError, match="another layout"):
        issued(layout(), assess(layout(500.0)), "A", "2024")


def test_a_tenth_more_current_moves_every_result_by_a_tenth():
    before, after = layout(400.0), layout(440.0)
    changes = changes_since(
        after,
        before,
        results=issued_results(assess(after)),
        results_before=issued_results(assess(before)),
    )
    (edit,) = changes.edits
    assert (edit.kind, edit.item, edit.field) == ("changed", "feeder", "demand")
    assert "400" in edit.before
    assert "440" in edit.after
    (moved,) = changes.moved
    assert moved.known.place == "desk"
    assert moved.relative == pytest.approx(0.1, rel=1e-6)


def test_an_origin_that_changed_is_told_in_words_of_the_trade():
    plan = SourceDocument(id="plan", name="Plan", revision="B")
    before = replace(layout(), documents=(plan,))
    origin = ValueOrigin(field="at", kind="document", document="plan", page="2")
    (desk,) = before.receptors
    after = replace(before, receptors=(replace(desk, origins=(origin,)),))
    (edit,) = changes_since(after, before).edits
    assert (edit.field, edit.words) == ("origins.at", "origin of place")
    assert (edit.before, edit.after) == ("assumed", "Plan rev. B, 2")


def test_items_that_came_and_went_are_edits_and_results():
    before = layout()
    chair = Receptor(id="chair", name="Chair", at=(2, 2, 1))
    after = replace(before, receptors=(chair,))
    changes = changes_since(
        after,
        before,
        results=issued_results(assess(after)),
        results_before=issued_results(assess(before)),
    )
    assert {(e.kind, e.title) for e in changes.edits} == {
        ("removed", "Desk"),
        ("added", "Chair"),
    }
    gone, new = changes.moved
    assert (gone.after, new.before) == (None, None)
    assert gone.relative is None


def test_the_same_results_do_not_move():
    results = issued_results(assess(layout()))
    assert moved_results(results, results) == ()


def test_an_issued_layout_computed_again_says_how_far_it_is():
    found = made()
    same = recomputed(found, assess(found))
    assert same.largest is None
    assert "every result is the same" in recomputed_text(same, {}, "µT")
    entry = found.revisions[0]
    (result,) = entry.results
    other = replace(
        entry,
        program_version="0.0.1",
        results=(replace(result, value=result.value / 1.02),),
    )
    older = replace(found, revisions=(other,))
    moved = recomputed(older, assess(older))
    assert moved.largest.relative == pytest.approx(0.02, rel=1e-6)
    text = recomputed_text(moved, names_of(found), "µT")
    assert "issued with Lodestead 0.0.1" in text
    assert "Desk" in text
    assert "+2 %" in text


def test_an_edited_layout_is_not_held_against_its_revision():
    found = made()
    edited = replace(found, receptors=())
    assert recomputed(edited, assess(edited)) is None


def test_opening_says_what_became_of_an_issued_layout():
    found = made()
    assert opening(layout()) is None
    same = opening(found, assess(found))
    assert "every result is the same" in same.sentence
    entry = found.revisions[0]
    (result,) = entry.results
    moved = replace(result, value=result.value / 1.02)
    older = replace(found, revisions=(replace(entry, results=(moved,)),))
    text = opening(older, assess(older), "mG").sentence
    assert "one result differs" in text
    assert "mG" in text
    assert "+2 %" in text
    edited = replace(found, receptors=())
    text = opening(edited).sentence
    assert "edited after revision A" in text
    bare = replace(found, revisions=(replace(entry, results=()),))
    text = opening(bare).sentence
    assert "without results" in text


def test_a_revision_that_cannot_be_frozen_leaves_no_half(tmp_path: Path, monkeypatch):
    def refuse(*_):
        raise UserError("no room")

    monkeypatch.setattr("engine.commands.revisions.write", refuse)
    choices = Choices(validate=False)
    with pytest.raises(UserError, match="no room"):
        freeze(layout(), tmp_path / "room.json", "B", "2024-05-01", choices=choices)
    assert list(tmp_path.iterdir()) == []


def test_freezing_can_be_cancelled(tmp_path: Path):
    with pytest.raises(ComputationCancelled):
        freeze(
            layout(),
            tmp_path / "room.json",
            "B",
            "2024-05-01",
            cancelled=lambda: True,
        )
    assert list(tmp_path.iterdir()) == []


def test_issue_freezes_layout_and_report(tmp_path: Path):
    path = tmp_path / "room.json"
    write(path, layout())
    frozen, printed = issue_revision(path, "B / 2", "2024-05-01")
    assert (frozen.name, printed.name) == ("room-rev-B-2.json", "room-rev-B-2.pdf")
    assert printed.read_bytes().startswith(b"%PDF")
    assert read(frozen) == read(path)
    assert read(path).revisions[0].revision == "B / 2"
    before = (path.read_bytes(), frozen.read_bytes(), printed.read_bytes())
    with pytest.raises(UserError, match="is there already"):
        issue_revision(path, "B / 2", "2024-05-01")
    assert before == (path.read_bytes(), frozen.read_bytes(), printed.read_bytes())


def test_changes_are_told_in_words_and_as_values():
    old, new = made(), replace(made(440.0), revisions=())
    changes, again = changes_between(old, new)
    text = as_text(changes, again, names_of(old, new), "µT")
    assert "changed Feeder, current or power: " in text
    assert "Desk, Entered currents: " in text
    assert "(+10 %)" in text
    assert "Revision A was issued" in text
    plain = as_json(changes, again)
    assert json.loads(json.dumps(plain))["moved"][0]["relative"] == pytest.approx(0.1)
