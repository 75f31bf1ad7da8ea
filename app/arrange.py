"""Commands of the Edit and Draw menus that need an answer first, asked in the bar."""

from __future__ import annotations

from PySide6.QtCore import QLocale, QObject

from app import commands
from app.ask_bar import AskBar, Question
from app.document import Document
from app.entry_words import angle
from engine.errors import UserError
from engine.shaping import Alignment
from engine.typed_lengths import typed_length

_ALIGNMENTS: dict[str, Alignment] = {
    "left sides": "least x",
    "middles from left to right": "middle x",
    "right sides": "greatest x",
    "lower sides on plan": "least y",
    "middles on plan": "middle y",
    "upper sides on plan": "greatest y",
    "lowest points": "least z",
    "middle heights": "middle z",
    "highest points": "greatest z",
}


class Arrange(QObject):
    """Asks for what moving, turning, repeating and building upwards need."""

    def __init__(self, document: Document, ask: AskBar) -> None:
        super().__init__(ask)
        self._document = document
        self._ask = ask

    def move(self) -> None:
        """Move the selection by typed lengths."""
        commands.selected(self._document)
        self._ask.ask("Move by", self._way("0"), "Move", self._move)

    def rotate(self) -> None:
        """Turn the selection about its middle."""
        commands.selected(self._document)
        question = Question(
            "degrees", "90", "Turn about the middle, counter-clockwise [degrees]"
        )
        self._ask.ask("Turn by", [question], "Turn", self._rotate)

    def mirror(self) -> None:
        """Mirror the selection about a line through its middle."""
        commands.selected(self._document)
        question = Question(
            "direction of the line [degrees]",
            "90",
            "0 is a line along +x, 90 one along +y, through the middle",
        )
        self._ask.ask("Mirror", [question], "Mirror", self._mirror)

    def repeat(self) -> None:
        """Repeat the selection at equal steps."""
        commands.selected(self._document)
        count = Question("copies", "1", "How many copies are made")
        self._ask.ask("Repeat", [count, *self._way("1")], "Repeat", self._repeat)

    def align(self) -> None:
        """Align the selected items with each other."""
        commands.selected(self._document)
        question = Question(
            "by their",
            "left sides",
            "What comes to lie on one line",
            tuple(_ALIGNMENTS),
        )
        self._ask.ask("Align", [question], "Align", self._align)

    def room_above(self) -> None:
        """Add a room above the selected one."""
        self._storey("above", commands.add_room_above)

    def room_below(self) -> None:
        """Add a room below the selected one."""
        self._storey("below", commands.add_room_below)

    def _storey(self, word: str, command: object) -> None:
        assert callable(command)
        question = Question(
            f"slab thickness [{self._unit}]",
            "0.30" if self._unit == "m" else "",
            "From the ceiling's soffit to the floor above",
        )

        def done(answers: list[str]) -> None:
            command(self._document, self._length(answers[0]))

        self._ask.ask(f"Add room {word}", [question], "Add", done)

    @property
    def _unit(self) -> str:
        return self._document.layout.settings.length_unit

    @property
    def _decimal(self) -> str:
        return "," if QLocale().decimalPoint() == "," else "."

    def _way(self, first: str) -> list[Question]:
        unit = self._unit
        return [
            Question(f"x [{unit}]", first, f"Across [{unit}]"),
            Question(f"y [{unit}]", "0", f"Upwards on the plan [{unit}]"),
            Question(f"z [{unit}]", "0", f"Higher [{unit}]"),
        ]

    def _length(self, text: str) -> float:
        return typed_length(text, self._unit, self._decimal)

    def _move(self, answers: list[str]) -> None:
        x, y, z = (self._length(text) for text in answers)
        commands.move_selection(self._document, x, y, z)

    def _rotate(self, answers: list[str]) -> None:
        commands.rotate_selection(
            self._document, angle(answers[0], decimal=self._decimal)
        )

    def _mirror(self, answers: list[str]) -> None:
        commands.mirror_selection(
            self._document, angle(answers[0], decimal=self._decimal)
        )

    def _repeat(self, answers: list[str]) -> None:
        if not answers[0].strip().isdigit():
            raise UserError("Enter how many copies are made, as a whole number.")
        x, y, z = (self._length(text) for text in answers[1:])
        commands.repeat_selection(self._document, int(answers[0]), x, y, z)

    def _align(self, answers: list[str]) -> None:
        commands.align_selection(self._document, _ALIGNMENTS[answers[0]])
