"""Tools without a window: pointer in metres in, layout and history out."""

from __future__ import annotations

from dataclasses import dataclass, field

import pytest

from app import commands
from app.document import Document
from app.entry_words import entry
from app.messages import Messages
from app.tools.drawing_tool import DrawingTool
from app.tools.enclosure import EnclosureTool
from app.tools.equipment import EquipmentTool
from app.tools.measure import MeasureTool
from app.tools.profile import ProfileTool
from app.tools.receptor import ReceptorTool
from app.tools.room import RoomTool
from app.tools.run import RunTool
from app.tools.select import SelectTool
from app.tools.tool import Pointer
from app.tools.zone import ZoneTool
from app.view_state import ViewState
from engine.errors import UserError
from engine.faults import layout_faults
from engine.layout import Layout, Settings
from engine.places import Storey
from engine.runs import CircuitShare, Flat, Run
from engine.starters import transformer_link_board


@dataclass
class Desk:
    """A document, a tool, and what was told."""

    tool: DrawingTool
    document: Document
    view_state: ViewState
    told: list[str] = field(default_factory=list)

    @property
    def layout(self) -> Layout:
        return self.document.layout

    @property
    def undo_text(self) -> str:
        return self.document.undo_stack.undoText()

    @property
    def steps(self) -> int:
        return self.document.undo_stack.count()

    def click(self, x: float, y: float, **more: object) -> None:
        self.tool.move(at(x, y, **more))
        self.tool.press(at(x, y, **more))
        self.tool.release(at(x, y, **more))

    def drag(self, *places: tuple[float, float], **more: object) -> None:
        self.tool.press(at(*places[0], **more))
        for place in places[1:]:
            self.tool.move(at(*place, **more))
        self.tool.release(at(*places[-1], **more))

    def type(self, words: str) -> None:
        self.tool.entry(entry(words))


def at(x: float, y: float, **more: object) -> Pointer:
    return Pointer(at=(x, y), raw=more.pop("raw", (x, y)), **more)


def desk(kind: type[DrawingTool], layout: Layout | None = None) -> Desk:
    document, view_state, messages = Document(layout), ViewState(), Messages()
    made = Desk(kind(document, view_state, messages), document, view_state)
    messages.told.connect(lambda _kind, sentence: made.told.append(sentence))
    made.tool.activate()
    return made


STOREYS = Layout(
    storeys=(
        Storey(id="ground", floor_level=0.0),
        Storey(id="first", floor_level=3.6),
    )
)


def test_a_room_by_two_corners_is_one_step() -> None:
    d = desk(RoomTool, STOREYS)
    d.click(0.0, 0.0)
    d.click(5.0, 4.0)
    (room,) = d.layout.rooms
    assert room.outline == ((0.0, 0.0), (5.0, 0.0), (5.0, 4.0), (0.0, 4.0))
    assert (room.storey, room.floor_level, room.ceiling_level) == ("ground", 0.0, 3.0)
    assert (d.steps, d.undo_text) == (1, "Draw Room 1")
    assert d.document.selection == {"room-1"}
    d.document.undo_stack.undo()
    assert d.layout == STOREYS


def test_a_room_by_dragging_and_by_its_size() -> None:
    d = desk(RoomTool)
    d.drag((1.0, 1.0), (2.0, 2.0), (4.0, 3.0))
    assert d.layout.rooms[0].outline[2] == (4.0, 3.0)
    d.click(10.0, 0.0)
    d.type("size -2 6")
    assert d.layout.rooms[1].outline[0] == (8.0, 0.0)
    assert d.layout.rooms[1].outline[2] == (10.0, 6.0)
    assert d.steps == 2


def test_a_room_on_the_storey_that_is_shown() -> None:
    d = desk(RoomTool, STOREYS)
    d.view_state.set(storey="first")
    d.drag((0.0, 0.0), (4.0, 3.0))
    assert (d.layout.rooms[0].floor_level, d.layout.rooms[0].storey) == (3.6, "first")


def test_a_polygon_ends_on_its_first_corner_or_by_enter() -> None:
    d = desk(RoomTool)
    d.tool.choose("shape", "polygon")
    for corner in ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0), (0.01, 0.01)):
        d.click(*corner)
    assert d.layout.rooms[0].outline == ((0.0, 0.0), (4.0, 0.0), (4.0, 3.0))
    for corner in ((0.0, 0.0), (0.0, 3.0), (2.0, 3.0)):
        d.click(*corner)
    d.tool.enter()
    assert len(d.layout.rooms) == 2


def test_an_outline_that_crosses_itself_is_refused_and_kept_to_be_mended() -> None:
    d = desk(RoomTool)
    d.tool.choose("shape", "polygon")
    for corner in ((0.0, 0.0), (3.0, 3.0), (3.0, 0.0), (0.0, 1.0)):
        d.click(*corner)
    d.tool.enter()
    assert d.steps == 0
    assert "crosses itself" in d.told[-1]
    d.tool.backspace()
    d.tool.enter()
    assert d.steps == 1


def test_escape_goes_one_step_back_until_nothing_is_left() -> None:
    d = desk(RunTool)
    d.click(0.0, 0.0)
    d.click(1.0, 0.0)
    assert d.tool.back()
    assert len(d.tool.points) == 1
    assert d.tool.back()
    assert not d.tool.back()


def test_an_enclosure_stands_on_the_floor() -> None:
    d = desk(EnclosureTool, STOREYS)
    d.drag((0.0, 0.0), (2.0, 0.6))
    (enclosure,) = d.layout.enclosures
    assert (enclosure.z_from, enclosure.z_to) == (0.0, 2.1)
    assert (enclosure.state, enclosure.front_clearance) == ("closed", None)


def test_a_zone_leaves_its_category_to_be_chosen() -> None:
    d = desk(ZoneTool, STOREYS)
    d.drag((0.0, 0.0), (4.0, 3.0))
    (zone,) = d.layout.zones
    assert (zone.category, zone.heights, zone.floor_level) == ("", (0.5, 1.0, 1.5), 0.0)
    assert d.undo_text == "Draw Zone 1"


def test_one_click_fills_a_room() -> None:
    d = desk(ZoneTool, transformer_link_board())
    d.tool.choose("shape", "fill a room")
    d.click(2.0, 2.0)
    assert d.undo_text == "Fill room Switch room with a zone"
    assert d.layout.zones[-1].outline[0] == (0.2, 0.2)
    d.click(50.0, 50.0)
    assert "no room at that place" in d.told[-1]


def test_a_run_has_the_height_of_its_room_and_makes_its_circuit() -> None:
    d = desk(RunTool, Layout(settings=Settings(frequency=60.0)))
    d.click(0.0, 0.0)
    d.click(4.0, 0.0)
    d.tool.double_click(at(4.0, 0.0))
    (run,) = d.layout.runs
    assert run.route == ((0.0, 0.0, 2.5), (4.0, 0.0, 2.5))
    assert (run.kind, run.section.order) == ("busbar", ("L1", "L2", "L3", "N"))
    assert (run.section.pitch, run.section.shape.turn) == (0.1, 90)
    (circuit,) = d.layout.circuits
    assert (circuit.base_frequency, circuit.demand) == (60.0, None)
    assert (d.steps, d.undo_text) == (1, "Draw Busbar 1")
    d.document.undo_stack.undo()
    assert d.layout.circuits == ()


def test_a_further_run_may_have_a_circuit_of_its_own() -> None:
    d = desk(RunTool)

    def draw(y: float) -> str:
        d.click(0.0, y)
        d.click(4.0, y)
        d.tool.enter()
        return d.layout.runs[-1].section.circuits[0].circuit

    assert "a new circuit" not in d.tool.choices()[2].values
    assert draw(0.0) == draw(1.0) == "circuit-1"
    d.tool.choose("circuit", "a new circuit")
    assert draw(2.0) == "circuit-2"
    assert d.tool.choices()[2].value == "as the last run"
    assert draw(3.0) == "circuit-2"
    d.document.undo_stack.undo()
    d.document.undo_stack.undo()
    assert [circuit.id for circuit in d.layout.circuits] == ["circuit-1"]


def test_a_run_under_the_ceiling() -> None:
    d = desk(RoomTool, STOREYS)
    d.drag((0.0, 0.0), (5.0, 4.0))
    tool = RunTool(d.document, d.view_state)
    tool.press(at(1.0, 1.0))
    assert tool.points[0] == (1.0, 1.0, 2.5)


def test_heights_come_vertex_by_vertex_from_the_entry_strip() -> None:
    d = desk(RunTool)
    d.type("to z 2.6")
    assert d.tool.points == ()
    d.type("to 3.2 -0.35")
    d.type("by 1.2 -0.4")
    d.type("go 2.4 toward 90")
    d.type("to 0 0 z 3.1")
    d.type("by z -1")
    d.tool.enter()
    assert d.layout.runs[0].route == (
        (3.2, -0.35, 2.6),
        (4.4, -0.75, 2.6),
        (4.4, 1.65, 2.6),
        (0.0, 0.0, 3.1),
        (0.0, 0.0, 2.1),
    )


def test_a_way_needs_a_place_to_count_from() -> None:
    d = desk(RunTool)
    d.type("by 1 1")
    assert "no place yet" in d.told[-1]
    d.type("size 2 2")
    assert "no meaning" in d.told[-1]
    assert d.tool.points == ()


def test_a_riser_in_two_clicks_to_the_next_floor() -> None:
    d = desk(RunTool, STOREYS)
    d.click(0.0, 0.0)
    d.tool.choose("next leg", "riser up")
    d.click(2.0, 0.0)
    d.click(2.0, 0.0)
    assert d.tool.points[-1] == (2.0, 0.0, 3.6)
    assert d.tool.next_leg == "level"
    d.click(3.0, 0.0)
    d.tool.enter()
    assert [z for _, _, z in d.layout.runs[0].route] == [2.5, 2.5, 3.6, 3.6]
    assert layout_faults(d.layout) == ()


def test_a_riser_may_be_the_whole_run() -> None:
    d = desk(RunTool)
    d.tool.choose("next leg", "riser up")
    d.click(2.0, 1.0)
    d.click(2.0, 1.0)
    d.tool.enter()
    assert d.layout.runs[0].route == ((2.0, 1.0, 2.5), (2.0, 1.0, 6.0))


def test_backspace_takes_the_last_vertex_back() -> None:
    d = desk(RunTool)
    for x in (0.0, 1.0, 2.0):
        d.click(x, 0.0)
    d.tool.backspace()
    d.tool.enter()
    assert len(d.layout.runs[0].route) == 2


def test_a_run_of_one_vertex_is_not_made() -> None:
    d = desk(RunTool)
    d.click(0.0, 0.0)
    d.tool.enter()
    assert d.steps == 0
    assert "at least two" in d.told[-1]


def test_a_run_from_transformer_to_board_is_connected() -> None:
    d = desk(EquipmentTool)
    d.tool.choose("kind", "transformer")
    d.click(0.0, 0.0)
    d.tool.choose("kind", "board")
    d.click(5.0, 0.0)
    d.click(7.0, 0.0)
    assert d.undo_text == "Place Board 1"
    run_tool = RunTool(d.document, d.view_state)
    run_tool.press(at(0.0, 0.0))
    run_tool.press(at(5.5, 0.0))
    run_tool.enter()
    (run,) = d.layout.runs
    assert run.start.equipment == "transformer-1"
    assert run.end.equipment == "board-1"
    assert layout_faults(d.layout) == ()
    (board,) = (unit for unit in d.layout.equipment if unit.id == "board-1")
    assert board.ways[0].circuits == run.section.circuits


def test_a_board_too_short_is_refused() -> None:
    d = desk(EquipmentTool)
    d.click(0.0, 0.0)
    d.click(0.1, 0.0)
    assert "at least 0.40 m" in d.told[-1]
    assert len(d.tool.points) == 1


def test_a_receptor_in_one_click_or_typed() -> None:
    d = desk(ReceptorTool, STOREYS)
    d.click(1.0, 2.0)
    assert d.layout.receptors[0].at == (1.0, 2.0, 1.0)
    d.type("to 3 2 z 1.2")
    assert d.layout.receptors[1].at == (3.0, 2.0, 1.2)
    assert d.steps == 2


def test_a_profile_lies_at_the_height_that_is_shown() -> None:
    d = desk(ProfileTool)
    d.view_state.set(height=1.5)
    d.click(0.0, 0.0)
    d.click(4.0, 0.0)
    d.tool.enter()
    assert d.layout.profiles[0].path == ((0.0, 0.0, 1.5), (4.0, 0.0, 1.5))


def test_measuring_edits_nothing() -> None:
    d = desk(MeasureTool)
    d.click(0.0, 0.0)
    d.click(3.0, 4.0)
    assert d.tool.text() == "5.00 m · 53.1° · dx 3.00 m · dy 4.00 m"
    assert d.tool.overlay().dimensions
    assert d.steps == 0
    assert d.tool.back()
    assert not d.tool.back()


def test_drawing_happens_on_the_plan() -> None:
    d = desk(RunTool)
    d.tool.press(at(0.0, 0.0, plane="looking +y"))
    assert d.tool.points == ()
    assert "on the plan" in d.told[-1]


# Select


LINK = "busbar-1"


def test_a_click_selects_and_shift_adds() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.click(1.0, 1.0, pick="switch-room")
    d.click(1.0, 6.0, pick="office", shift=True)
    assert d.document.selection == {"switch-room", "office"}
    d.click(1.0, 6.0, pick="office")
    assert d.document.selection == {"switch-room", "office"}
    d.click(-5.0, -5.0)
    assert d.document.selection == frozenset()


def hint_of(d: Desk) -> str:
    return d.tool.hint.partition(":")[0]


STACKED = {"pick": "a", "beneath": ("b", "c")}


def stacked() -> Desk:
    """Three runs that lie over each other on plan."""
    section = Flat(circuits=(CircuitShare(circuit="f"),))
    runs = tuple(
        Run(id=id, route=((0.0, 0.0, z), (4.0, 0.0, z)), section=section)
        for id, z in (("a", 3.0), ("b", 2.0), ("c", 1.0))
    )
    return desk(SelectTool, Layout(runs=runs))


def test_clicks_at_one_place_go_down_through_what_lies_there() -> None:
    d = stacked()
    seen = []
    for k in range(4):
        d.click(2.0 + 0.01 * k, 0.0, **STACKED)
        seen.append((*d.document.selection, hint_of(d)))
    assert seen == [
        ("a", "1 of 3 here"),
        ("b", "2 of 3 here"),
        ("c", "3 of 3 here"),
        ("a", "1 of 3 here"),
    ]
    d.click(2.5, 0.0, **STACKED)
    assert d.document.selection == {"a"}


def test_a_click_elsewhere_and_another_view_begin_at_the_top() -> None:
    d = stacked()
    d.click(2.0, 0.0, **STACKED)
    d.click(2.0, 0.0, plane="looking +y", **STACKED)
    assert d.document.selection == {"a"}
    d.document.select({"b"})
    assert "of 3" not in d.tool.hint
    d.click(2.0, 0.0, plane="looking +y", **STACKED)
    assert d.document.selection == {"a"}


def test_a_drag_moves_the_one_taken_from_beneath() -> None:
    d = stacked()
    d.click(2.0, 0.0, **STACKED)
    d.click(2.0, 0.0, **STACKED)
    d.drag((2.0, 0.0), (2.0, 0.5), (2.0, 1.0), **STACKED)
    assert [run.route[0][1] for run in d.layout.runs] == [0.0, 1.0, 0.0]
    assert d.document.selection == {"b"}


def test_a_vertex_is_taken_before_what_lies_beneath_it() -> None:
    d = stacked()
    for chosen in ("a", "a", "b", "b", "c"):
        d.click(4.0, 0.0, **STACKED)
        assert d.document.selection == {chosen}


def test_quick_clicks_go_down_and_insert_nothing() -> None:
    d = stacked()
    seen = []
    for _ in range(2):
        d.click(2.0, 0.0, **STACKED)
        d.tool.double_click(at(2.0, 0.0, **STACKED))
        seen.append((*d.document.selection, hint_of(d)))
    assert seen == [("b", "2 of 3 here"), ("a", "1 of 3 here")]
    assert [len(run.route) for run in d.layout.runs] == [2, 2, 2]


def test_a_double_click_is_for_what_was_chosen_before_it() -> None:
    d = stacked()
    d.document.select({"a"})
    d.click(2.0, 0.0, **STACKED)
    d.tool.double_click(at(2.0, 0.0, **STACKED))
    assert [len(run.route) for run in d.layout.runs] == [3, 2, 2]
    assert d.document.selection == {"a"}


def test_shift_adds_the_uppermost_only() -> None:
    d = stacked()
    d.click(2.0, 0.0, **STACKED)
    d.click(2.0, 0.0, shift=True, **STACKED)
    assert d.document.selection == {"a"}
    d.click(2.0, 0.0, **STACKED)
    assert d.document.selection == {"a"}


def test_a_box_takes_what_lies_wholly_inside() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.drag((9.5, 10.5), (3.0, 3.0), (-0.5, 5.1))
    assert d.document.selection == {"office", "office-zone"}
    d.drag((-1.0, -1.0), (9.5, 5.1), shift=True)
    assert LINK in d.document.selection
    assert "office" in d.document.selection


def test_a_box_leaves_hidden_layers_alone() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.view_state.set(hidden=frozenset({"zones"}))
    d.drag((9.5, 10.5), (-0.5, 5.1))
    assert d.document.selection == {"office"}


def test_a_drag_moves_by_the_exact_way_in_one_step() -> None:
    d = desk(SelectTool, transformer_link_board())
    before = d.layout.runs[0].route
    seen: list[bool] = []
    d.document.changed.connect(lambda *_: seen.append(d.document.is_previewing))
    d.drag((3.0, 3.0), (3.2, 3.1), (4.2, 3.3), pick=LINK)
    assert True in seen
    moved = [(round(x + 1.2, 9), round(y + 0.3, 9), z) for x, y, z in before]
    assert d.layout.runs[0].route == tuple(moved)
    assert (d.steps, d.undo_text) == (1, "Move busbar LV link")
    d.document.undo_stack.undo()
    assert d.layout.runs[0].route == before


@pytest.mark.parametrize(
    ("grip", "end", "way"),
    [
        # By the middle of its leg, by a vertex, and elsewhere by the grid on the leg.
        ((4.12, 3.02), (4.6, 3.5), None),
        ((1.52, 3.03), (2.0, 4.0), (0.5, 1.0)),
        ((3.017, 3.02), (4.2, 3.7), (1.2, 0.7)),
    ],
)
def test_a_caught_drag_counts_from_the_exact_place_gripped(
    grip: tuple[float, float],
    end: tuple[float, float],
    way: tuple[float, float] | None,
) -> None:
    d = desk(SelectTool, transformer_link_board())
    before = d.layout.runs[0].route
    if way is None:
        middle = (before[1][0] + before[2][0]) / 2
        way = (end[0] - middle, end[1] - 3.0)
    d.tool.press(at(*grip, pick=LINK))
    d.tool.move(at(*end, raw=(end[0] + 0.03, end[1]), caught="grid"))
    d.tool.release(at(*end, raw=(end[0] + 0.03, end[1]), caught="grid"))
    after = d.layout.runs[0].route
    assert after[0][0] == pytest.approx(before[0][0] + way[0], abs=1e-9)
    assert after[0][1] == pytest.approx(before[0][1] + way[1], abs=1e-9)


def test_a_twitch_is_a_click() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.drag((3.0, 3.0), (3.02, 3.0), pick=LINK)
    assert d.steps == 0


def test_escape_ends_a_drag_without_a_change() -> None:
    d = desk(SelectTool, transformer_link_board())
    before = d.layout
    d.tool.press(at(3.0, 3.0, pick=LINK))
    d.tool.move(at(4.0, 3.0))
    assert d.document.is_previewing
    assert d.tool.back()
    d.tool.release(at(4.0, 3.0))
    assert d.layout is before
    assert d.steps == 0
    assert d.tool.back()
    assert d.document.selection == frozenset()
    assert not d.tool.back()


def test_a_vertex_is_dragged_by_its_handle() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.document.select(["office"])
    d.drag((0.0, 5.2), (-1.0, 5.2), pick="office")
    assert d.layout.rooms[1].outline[0] == (-1.0, 5.2)
    assert d.undo_text == "Move a vertex of room Office"


def test_a_vertex_is_not_dragged_onto_its_neighbour() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.document.select(["office"])
    d.drag((0.0, 5.2), (5.0, 5.2), (9.0, 5.2))
    assert d.steps == 0
    assert "neighbour" in d.told[-1]
    assert not d.document.is_previewing


def test_an_outline_is_not_dragged_across_itself() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.document.select(["office"])
    d.drag((0.0, 5.2), (5.0, 5.2), (5.0, 20.0))
    assert d.steps == 0
    assert "crosses itself" in d.told[-1]


def test_a_double_click_inserts_a_vertex_and_delete_removes_it() -> None:
    d = desk(SelectTool, transformer_link_board())
    before = d.layout.runs[0].route
    d.click(3.0, 3.0, pick=LINK)
    d.tool.double_click(at(3.0, 3.0, pick=LINK))
    assert d.layout.runs[0].route[2] == (3.0, 3.0, 2.7)
    assert d.undo_text == "Insert a vertex in busbar LV link"
    d.tool.delete()
    assert d.layout.runs[0].route == before
    assert d.undo_text == "Delete a vertex of busbar LV link"


def test_delete_removes_what_is_selected() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.document.select([LINK, "board-1"])
    d.tool.delete()
    assert d.layout.runs == ()
    assert d.undo_text == "Delete 2 items"
    d.tool.delete()
    assert d.steps == 1


def test_arrows_nudge_and_words_move() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.document.select(["cubicle"])
    x, y = d.layout.enclosures[0].footprint[0]
    d.tool.nudge(0.1, 0.0)
    assert d.layout.enclosures[0].footprint[0] == (round(x + 0.1, 9), y)
    assert d.undo_text == "Nudge enclosure Cubicle of the board"
    d.type("by 0 0.25")
    assert d.layout.enclosures[0].footprint[0][1] == y + 0.25
    d.type("to 1 1")
    assert d.layout.enclosures[0].footprint[0] == (1.0, 1.0)
    d.type("size 2 1")
    assert d.layout.enclosures[0].footprint[2] == (3.0, 2.0)
    assert d.steps == 4


def test_moving_in_an_elevation_changes_the_height() -> None:
    d = desk(SelectTool, transformer_link_board())
    before = d.layout.runs[0].route
    d.drag((5.0, 2.7), (5.2, 2.9), (5.5, 3.0), pick=LINK, plane="looking +y")
    dx, dz = 0.5, 0.3
    expected = [(round(x + dx, 9), y, round(z + dz, 9)) for x, y, z in before]
    assert d.layout.runs[0].route == tuple(expected)
    d.document.undo_stack.undo()
    d.drag((-3.0, 2.4), (-3.2, 2.4), (-4.0, 2.4), pick=LINK, plane="looking +x")
    assert d.layout.runs[0].route[1][1] == 4.0


def test_entries_without_a_selection_are_told() -> None:
    d = desk(SelectTool, transformer_link_board())
    d.type("by 1 1")
    assert "Nothing is selected" in d.told[-1]


def test_commands_are_one_readable_step_each() -> None:
    document = Document(transformer_link_board())
    document.select([LINK])
    texts = []
    for command in (
        lambda: commands.rotate_selection(document, 90.0),
        lambda: commands.mirror_selection(document, 90.0),
        lambda: commands.repeat_selection(document, 1, 0.0, 1.0),
        lambda: commands.repeat_selection(document, 3, 0.0, 1.0),
        lambda: commands.align_selection(document, "least y"),
    ):
        command()
        texts.append(document.undo_stack.undoText())
        if document.undo_stack.count() < 3:
            document.select([LINK])
    assert texts == [
        "Turn busbar LV link by 90°",
        "Mirror busbar LV link",
        "Duplicate busbar LV link",
        "Repeat busbar LV link 3 times",
        "Align 3 busbars at the least y",
    ]
    while document.undo_stack.canUndo():
        document.undo_stack.undo()
    assert document.layout == transformer_link_board()


def test_rooms_above_and_a_split_by_command() -> None:
    document = Document(transformer_link_board())
    document.select(["office"])
    commands.add_room_above(document, 0.25)
    assert document.undo_stack.undoText() == "Add a room above room Office"
    assert document.layout.rooms[-1].floor_level == 3.25
    document.select([LINK])
    commands.split_selected_run(document, 1, (3.0, 3.0, 2.7))
    assert document.undo_stack.undoText() == "Split busbar LV link"
    assert len(document.selection) == 2
    with pytest.raises(UserError, match="Select one run"):
        commands.split_selected_run(document, 1, (3.0, 3.0, 2.7))


def test_every_tool_has_name_key_icon_and_hint() -> None:
    kinds = (
        SelectTool, RoomTool, EnclosureTool, EquipmentTool, RunTool, ZoneTool,
        ReceptorTool, ProfileTool, MeasureTool,
    )  # fmt: skip
    for number, kind in enumerate(kinds, start=1):
        tool = desk(kind).tool
        assert tool.key == str(number)
        assert tool.name
        assert tool.icon
        assert tool.hint.endswith(".")


def test_what_is_deleted_while_the_button_is_held_is_not_named() -> None:
    d = stacked()
    d.tool.press(at(2.0, 0.0, **STACKED))
    d.document.edit("Delete", Layout())
    d.tool.release(at(2.0, 0.0, **STACKED))
    assert "of 3" not in d.tool.hint
