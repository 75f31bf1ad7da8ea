"""Text that is written from right to left: its order on paper, Arabic letters joined.

Text is kept and broken into lines in the order in which it is read; a line is put into
the order in which it stands on paper only when it is drawn.
"""

from __future__ import annotations

import re
import unicodedata
from functools import cache, lru_cache
from typing import NamedTuple

from bidi.algorithm import get_display

_RIGHT_TO_LEFT = ("R", "AL")

#: After these a new part begins: a value after a name must not go before the name.
_PARTING = re.compile(r"([,;:·=–“”(\[])")
_LEFT_TO_RIGHT = "\N{LEFT-TO-RIGHT MARK}"

#: Code points of joined forms of Arabic letters, each decomposed into its letters.
_FORMS = range(0xFE70, 0xFEFD)

_KINDS = ("isolated", "final", "initial", "medial")


class _Letter(NamedTuple):
    """The forms of an Arabic letter; empty where it has none."""

    isolated: str = ""
    final: str = ""
    initial: str = ""
    medial: str = ""


def is_right_to_left(text: str) -> bool:
    """Whether any of a text is written from right to left.

    >>> is_right_to_left("Bar L1"), is_right_to_left("\\u05d0")
    (False, True)
    """
    if text.isascii():
        return False
    return any(unicodedata.bidirectional(c) in _RIGHT_TO_LEFT for c in text)


def reads_from_right(text: str) -> bool:
    """Whether a paragraph is read from the right: most of its letters say so.

    Its first letter, as UAX 9 has it, does not: names that users typed begin
    sentences of the program.

    >>> reads_from_right("b \u05d0\u05d1"), reads_from_right("\u05d0: found")
    (True, False)
    """
    directions = [unicodedata.bidirectional(c) for c in text]
    return sum(d in _RIGHT_TO_LEFT for d in directions) > directions.count("L")


def displayed(line: str, from_right: bool | None = None) -> str:
    """One line in the order in which it stands on paper, from left to right.

    The Unicode bidirectional algorithm (UAX 9).

    Parameters
    ----------
    from_right : bool or None
        Whether its paragraph is read from the right. None: only a line without any
        letter of the other direction is.
    """
    if not is_right_to_left(line):
        return line
    if from_right is None:
        from_right = all(unicodedata.bidirectional(c) != "L" for c in line)
    return _ordered(line, from_right)


@lru_cache(maxsize=4096)
def _ordered(line: str, from_right: bool) -> str:
    text = joined(line)
    if not from_right:
        text = _PARTING.sub(rf"\1{_LEFT_TO_RIGHT}", text)
    ordered: str = get_display(text, base_dir="R" if from_right else "L")
    return ordered.replace(_LEFT_TO_RIGHT, "")


def joined(text: str) -> str:
    """Text in reading order whose Arabic letters have the forms that join.

    Forms are those of Unicode's block Arabic Presentation Forms-B, as far as letters
    have them there; marks over and under letters stay.
    """
    letters, ligatures = _tables()
    if not any(c in letters for c in text):
        return text
    made: list[str] = []
    joins = False  # whether the letter before reaches out to the next
    k = 0
    while k < len(text):
        letter = letters.get(text[k])
        if letter is None:
            made.append(text[k])
            # Marks are no letters: what they stand on joins through them.
            joins = joins and unicodedata.category(text[k]) == "Mn"
            k += 1
            continue
        taken = 1
        pair = ligatures.get(text[k : k + 2])
        if pair is not None:
            letter, taken = pair, 2
        reaches = bool(letter.initial) and _meets(text, k + taken, letters)
        made.append(_form(letter, joins, reaches) or text[k : k + taken])
        joins = reaches
        k += taken
    return "".join(made)


def _form(letter: _Letter, joins: bool, reaches: bool) -> str:
    if joins and reaches:
        return letter.medial
    if joins:
        return letter.final
    return letter.initial if reaches else letter.isolated


def _meets(text: str, at: int, letters: dict[str, _Letter]) -> bool:
    """Whether the next letter can be joined to from before."""
    for character in text[at:]:
        if unicodedata.category(character) != "Mn":
            found = letters.get(character)
            return found is not None and bool(found.final)
    return False


@cache
def _tables() -> tuple[dict[str, _Letter], dict[str, _Letter]]:
    """Forms by letter, and by the pairs of letters that are written as one."""
    forms: dict[str, dict[str, str]] = {}
    for code in _FORMS:
        tag, *codes = unicodedata.decomposition(chr(code)).split() or [""]
        kind = tag.strip("<>")
        base = "".join(chr(int(part, 16)) for part in codes)
        if kind in _KINDS and not any(c.isspace() or c == "ـ" for c in base):
            forms.setdefault(base, {})[kind] = chr(code)
    made = {base: _Letter(**kinds) for base, kinds in forms.items()}
    return (
        {base: letter for base, letter in made.items() if len(base) == 1},
        {base: letter for base, letter in made.items() if len(base) == 2},
    )
