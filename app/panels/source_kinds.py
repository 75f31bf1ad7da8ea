"""Kinds of values of sources: circuits carried, and solid shapes."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import Any

from app.panels.kinds import Terms, small
from engine.circuits import Circuit
from engine.errors import UserError
from engine.runs import Bar, Carried, CircuitShare, Round
from engine.typed_lengths import length_figures, length_text, typed_length
from engine.typed_numbers import number_text, typed_number, typed_quantity

_TURN = re.compile(r"[,;]?\s*turn(?:ed)?\s+(\S+?)\s*°?$", re.IGNORECASE)
_SHARE = re.compile(r"^(.*?)\s+at\s+(\S+\s*%)$", re.IGNORECASE)


@dataclass(frozen=True)
class CarriedCircuits:
    """Circuits by name, in part where said so: `F1; F2 at 50%`."""

    def text(self, value: Any, terms: Terms) -> str:
        known = {circuit.id: circuit.title for circuit in terms.layout.circuits}
        shown = []
        for share in value or ():
            name = known.get(share.circuit, share.circuit)
            part = number_text(share.share * 100, terms.decimal)
            shown.append(name if share.share == 1 else f"{name} at {part}%")
        return "; ".join(shown)

    def read(self, text: str, terms: Terms) -> Carried:
        found = []
        for word in (part.strip() for part in text.split(";")):
            if not word:
                continue
            share = 1.0
            part = _SHARE.match(word)
            if part is not None:
                word = part[1].strip()
                share = typed_quantity(part[2], {"%": 0.01}, "%", terms.decimal)
            circuit = _circuit(word, terms)
            found.append(CircuitShare(circuit=circuit.id, share=share))
        return tuple(found)


@dataclass(frozen=True)
class SolidShape:
    """A bar `100 x 10`, with `turn 90` on edge, or a round conductor `28`."""

    def text(self, value: Any, terms: Terms) -> str:
        unit = small(terms)
        if isinstance(value, Round):
            return f"⌀ {length_text(value.diameter, unit, terms.decimal)}"
        assert isinstance(value, Bar)
        width = length_figures(value.width, unit, terms.decimal)
        size = f"{width} × {length_text(value.thickness, unit, terms.decimal)}"
        turn = number_text(value.turn, terms.decimal)
        return size if value.turn == 0 else f"{size}, turn {turn}"

    def read(self, text: str, terms: Terms) -> Round | Bar:
        unit = small(terms)
        plain, turn = text.strip(), 0.0
        turned = _TURN.search(plain)
        if turned is not None:
            plain, turn = plain[: turned.start()], typed_number(turned[1])
        sizes = [
            word.strip() for word in re.split(r"[×x*]", plain.lstrip("⌀ØΦø").strip())
        ]
        if not 1 <= len(sizes) <= 2 or not all(sizes):
            raise UserError(
                f"“{text[:40]}” is no size: enter a bar as 100 x 10, or the diameter "
                "of a round conductor."
            )
        named = re.search(r"(mm|cm|m|in|ft)$", sizes[-1])
        if named is not None:
            sizes = [s if re.search(r"[a-z]$", s) else s + named[1] for s in sizes]
        lengths = [typed_length(size, unit, terms.decimal) for size in sizes]
        if len(lengths) == 1:
            return Round(diameter=lengths[0])
        return Bar(width=lengths[0], thickness=lengths[1], turn=turn)


def _circuit(word: str, terms: Terms) -> Circuit:
    for circuit in terms.layout.circuits:
        if word in (circuit.id, circuit.title):
            return circuit
    known = ", ".join(circuit.title for circuit in terms.layout.circuits[:8])
    raise UserError(
        f"There is no circuit “{word[:40]}”; "
        + (f"known are {known}." if known else "draw up circuits first.")
    )
