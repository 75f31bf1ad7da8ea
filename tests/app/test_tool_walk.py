"""A seeded walk over tools and commands: no exception, and every step can be undone."""

from __future__ import annotations

import random
from contextlib import suppress

import pytest

from app import commands
from app.clipboard import copied_text, pasted
from app.document import Document
from app.entry_words import entry
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
from engine.layout_file import decode, encode
from engine.shaping import Alignment
from engine.starters import transformer_link_board

KINDS = (
    SelectTool, RoomTool, EnclosureTool, EquipmentTool, RunTool, ZoneTool,
    ReceptorTool, ProfileTool, MeasureTool, SelectTool, SelectTool,
)  # fmt: skip

WORDS = (
    "to 1 2", "to 3 0 z 2.6", "to z 3", "by 0.5 0", "by z 0.4", "go 1.5 toward 90",
    "go 1 toward 30 down 0.2", "size 2 3", "size -1 2",
)  # fmt: skip


class Walk:
    """Random actions on one document."""

    def __init__(self, seed: int) -> None:
        self.random = random.Random(seed)
        self.document = Document(transformer_link_board())
        self.view_state = ViewState()
        self.tools = [kind(self.document, self.view_state) for kind in KINDS]
        self.tool: DrawingTool = self.tools[0]

    def pointer(self) -> Pointer:
        pick = self.random.random
        raw = (self.random.uniform(-2, 12), self.random.uniform(-2, 12))
        at = (round(raw[0], 1), round(raw[1], 1)) if pick() < 0.8 else raw
        ids = [item.id for item in self.document.committed.items()][2:]
        return Pointer(
            at=at,
            raw=raw,
            caught="grid" if at != raw else "",
            shift=pick() < 0.2,
            pick=self.random.choice(ids) if ids and pick() < 0.6 else None,
            plane=self.random.choice(("plan",) * 6 + ("looking +x", "looking +y")),
        )

    def step(self) -> None:
        act = self.random.choice((
            self.change_tool, self.choose, self.click, self.click, self.click,
            self.drag, self.drag, self.drag, self.keys, self.keys, self.type,
            self.type, self.command, self.command, self.undo, self.paste,
        ))  # fmt: skip
        act()

    def change_tool(self) -> None:
        self.tool.deactivate()
        self.tool = self.random.choice(self.tools)
        self.tool.activate()
        storeys = [storey.id for storey in self.document.committed.storeys]
        self.view_state.set(storey=self.random.choice(["", *storeys]))

    def choose(self) -> None:
        for choice in self.tool.choices():
            self.tool.choose(choice.name, self.random.choice(choice.values))

    def click(self) -> None:
        pointer = self.pointer()
        self.tool.move(pointer)
        self.tool.press(pointer)
        self.tool.overlay()
        self.tool.release(pointer)

    def drag(self) -> None:
        self.tool.press(self.pointer())
        for _ in range(3):
            self.tool.move(self.pointer())
            self.tool.overlay()
        if self.random.random() < 0.2:
            self.tool.back()
        self.tool.release(self.pointer())

    def keys(self) -> None:
        self.random.choice((
            self.tool.enter, self.tool.backspace, self.tool.back, self.tool.delete,
            lambda: self.tool.nudge(0.1, 0.0),
            lambda: self.tool.double_click(self.pointer()),
        ))()  # fmt: skip

    def type(self) -> None:
        self.tool.entry(entry(self.random.choice(WORDS)))

    def command(self) -> None:
        document, draw = self.document, self.random
        runs = [run.id for run in document.committed.runs]
        how: Alignment = draw.choice(("least x", "middle y", "greatest z"))
        with suppress(UserError):
            draw.choice((
                lambda: commands.rotate_selection(document, draw.choice((90.0, 17.0))),
                lambda: commands.mirror_selection(document, draw.choice((0.0, 90.0))),
                lambda: commands.repeat_selection(document, 1, 0.5, 0.5),
                lambda: commands.align_selection(document, how),
                lambda: commands.fill_room(document),
                lambda: commands.add_room_above(document, 0.25),
                lambda: commands.add_room_below(document, 0.25),
                lambda: document.select([draw.choice(runs)] if runs else []),
                lambda: self.split(),
            ))()  # fmt: skip

    def split(self) -> None:
        for run in self.document.committed.runs:
            if self.document.selection == {run.id}:
                a, b = run.route[:2]
                middle = tuple((p + q) / 2 for p, q in zip(a, b, strict=True))
                commands.split_selected_run(self.document, 0, middle)
                return

    def undo(self) -> None:
        stack = self.document.undo_stack
        before = self.document.committed
        if stack.canUndo():
            stack.undo()
            stack.redo()
            assert self.document.committed == before
            if self.random.random() < 0.5:
                stack.undo()

    def paste(self) -> None:
        document = self.document
        if self.random.random() < 0.7 or not document.selection:
            return
        try:
            text = copied_text(document.committed, document.selection)
            layout, names = pasted(document.committed, text, (0.5, -0.5))
        except UserError:
            return
        document.edit("Paste", layout)
        document.select(names)


@pytest.mark.parametrize("seed", range(4))
def test_a_walk_can_be_undone_to_its_beginning(seed: int) -> None:
    walk = Walk(seed)
    for _ in range(500):
        walk.step()
        stack = walk.document.undo_stack
        assert all(stack.text(i) for i in range(stack.count()))
        if walk.random.random() < 0.05 and len(walk.document.committed.runs) > 30:
            while stack.canUndo():
                stack.undo()
    walk.tool.deactivate()
    assert stack.count() > 20
    last = walk.document.committed
    assert walk.document.layout is last
    assert decode(encode(last), "the walk") == last
    while stack.canUndo():
        stack.undo()
    assert walk.document.layout == transformer_link_board()
    while stack.canRedo():
        stack.redo()
