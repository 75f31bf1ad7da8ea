"""Kinds of values in forms and tables: how each is written, read and summed up.

No Qt. `text` gives what a field shows, `read` makes a value of what was typed and
raises `UserError` with a whole sentence.
"""

from __future__ import annotations

import re
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any, Protocol

from engine.errors import UserError
from engine.layout import Layout
from engine.typed_lengths import length_figures, length_text, typed_length
from engine.typed_numbers import number_text, typed_quantity
from engine.units import FLUX_DENSITY_UNITS, TYPED_UNITS


@dataclass(frozen=True)
class Terms:
    """What reading and writing depend on: the layout with its units, the locale."""

    layout: Layout
    decimal: str = "."

    @property
    def unit(self) -> str:
        """The layout's unit of length."""
        return self.layout.settings.length_unit


class Kind(Protocol):
    """How values of one kind are written and read."""

    def text(self, value: Any, terms: Terms) -> str:
        """What a field shows; empty for nothing."""

    def read(self, text: str, terms: Terms) -> Any:
        """The value of what was typed. Raises `UserError`."""


@dataclass(frozen=True)
class Words:
    """Any text."""

    def text(self, value: Any, _terms: Terms) -> str:
        return value or ""

    def read(self, text: str, _terms: Terms) -> str:
        return text.strip()


@dataclass(frozen=True)
class Lines(Words):
    """Text of several lines."""


@dataclass(frozen=True)
class Distance:
    """A length; a bare number is in the layout's unit, or in `unit`."""

    unit: str = ""
    is_optional: bool = False

    def text(self, value: Any, terms: Terms) -> str:
        if value is None:
            return ""
        return length_text(value, self.unit or terms.unit, terms.decimal)

    def read(self, text: str, terms: Terms) -> float | None:
        if self.is_optional and not text.strip():
            return None
        return typed_length(text, self.unit or terms.unit, terms.decimal)


def small(terms: Terms) -> str:
    """The unit of section dimensions that goes with the layout's unit."""
    return section_unit(terms.unit)


def section_unit(length_unit: str) -> str:
    """The unit of dimensions in sections beside lengths in `length_unit`."""
    return {"m": "mm", "ft": "in"}.get(length_unit, length_unit)


@dataclass(frozen=True)
class Dimension(Distance):
    """A length in a section: millimetres or inches."""

    def text(self, value: Any, terms: Terms) -> str:
        if value is None:
            return ""
        return length_text(value, small(terms), terms.decimal)

    def read(self, text: str, terms: Terms) -> float | None:
        if self.is_optional and not text.strip():
            return None
        return typed_length(text, small(terms), terms.decimal)


@dataclass(frozen=True)
class Amount:
    """A number with a unit: amperes, volts, degrees, hertz, percent, a bare number."""

    units: Mapping[str, float] = field(default_factory=lambda: {"": 1.0})
    unit: str = ""
    is_optional: bool = False
    is_whole: bool = False

    def text(self, value: Any, terms: Terms) -> str:
        if value is None:
            return ""
        figures = number_text(value / self.units[self.unit], terms.decimal)
        return figures + ("" if self.unit in ("", "°") else " ") + self.unit

    def read(self, text: str, terms: Terms) -> float | int | None:
        if self.is_optional and not text.strip():
            return None
        value = typed_quantity(text, self.units, self.unit, terms.decimal)
        if not self.is_whole:
            return value
        if value != int(value):
            raise UserError(f"Enter a whole number, not {text.strip()}.")
        return int(value)


AMPERES = {"A": 1.0, "kA": 1e3, "mA": 1e-3}
VOLTS = {"V": 1.0, "kV": 1e3}
VOLT_AMPERES = {"VA": 1.0, "kVA": 1e3, "MVA": 1e6}
DEGREES = {"°": 1.0, "deg": 1.0}
HERTZ = {"Hz": 1.0, "kHz": 1e3}
PERCENT = {"%": 0.01}


@dataclass(frozen=True)
class FluxDensity:
    """A flux density in the layout's unit."""

    is_optional: bool = False

    def text(self, value: Any, terms: Terms) -> str:
        if value is None:
            return ""
        unit = terms.layout.settings.flux_density_unit
        figures = number_text(value / FLUX_DENSITY_UNITS[unit], terms.decimal, 6)
        return f"{figures} {unit}"

    def read(self, text: str, terms: Terms) -> float | None:
        if self.is_optional and not text.strip():
            return None
        known = {
            **FLUX_DENSITY_UNITS,
            **{typed: FLUX_DENSITY_UNITS[u] for typed, u in TYPED_UNITS.items()},
            "T": 1.0,
        }
        unit = terms.layout.settings.flux_density_unit
        return typed_quantity(text, known, unit, terms.decimal)


@dataclass(frozen=True)
class Distances:
    """Several lengths between blanks: heights, a place, a range.

    `count` is how many there must be; None: any number.
    """

    count: int | None = None
    is_optional: bool = False

    def text(self, value: Any, terms: Terms) -> str:
        if value is None:
            return ""
        figures = (length_figures(v, terms.unit, terms.decimal) for v in value)
        return "  ".join(figures) + (f" {terms.unit}" if value else "")

    def read(self, text: str, terms: Terms) -> tuple[float, ...] | None:
        if self.is_optional and not text.strip():
            return None
        words = [word for word in re.split(r"[\s;]+", text.strip()) if word]
        if words and words[-1] in ("m", "mm", "cm", "ft", "in"):
            unit = words.pop()
        else:
            unit = terms.unit
        if not words or (self.count is not None and len(words) != self.count):
            wanted = "at least one length" if self.count is None else ""
            raise UserError(
                f"Enter {wanted or f'{self.count} lengths'} with blanks between them, "
                f"units glued on, not “{text.strip()[:40]}”."
            )
        return tuple(
            typed_length(w, "m" if unit == "cm" else unit, terms.decimal)
            / (100 if unit == "cm" and w[-1:].isdigit() else 1)
            for w in words
        )


@dataclass(frozen=True)
class Labels:
    """Conductors in their order between blanks: L1 L2 L3 N."""

    def text(self, value: Any, _terms: Terms) -> str:
        return " ".join(value or ())

    def read(self, text: str, _terms: Terms) -> tuple[str, ...]:
        labels = tuple(label for label in re.split(r"[\s,;]+", text.strip()) if label)
        if not labels:
            raise UserError("Enter the conductors in their order, such as L1 L2 L3 N.")
        return labels


@dataclass(frozen=True)
class Numbers:
    """Several numbers between blanks.

    `count` is how many there must be; None: any number, or none.
    """

    count: int | None = None

    def text(self, value: Any, terms: Terms) -> str:
        return "  ".join(number_text(v, terms.decimal) for v in value or ())

    def read(self, text: str, terms: Terms) -> tuple[float, ...]:
        words = [word for word in re.split(r"[\s;°]+", text.strip()) if word]
        if self.count is not None and len(words) != self.count:
            raise UserError(f"Enter {self.count} numbers with a blank between them.")
        return tuple(typed_quantity(w, {"": 1.0}, "", terms.decimal) for w in words)


Option = tuple[Any, str]


@dataclass(frozen=True)
class Choice:
    """One of several values, each with its words."""

    options: Callable[[Layout], Sequence[Option]]

    def text(self, value: Any, terms: Terms) -> str:
        for known, words in self.options(terms.layout):
            if known == value:
                return words
        return "" if value is None else str(value)

    def read(self, text: str, terms: Terms) -> Any:
        for known, words in self.options(terms.layout):
            if text in (words, known):
                return known
        raise UserError(f"“{text}” is none of the choices.")


def one_of(*values: str, **words: str) -> Choice:
    """A choice of fixed values; `words` says in what words where they differ."""
    options = tuple((value, words.get(value, value)) for value in values)
    return Choice(lambda _layout: options)


@dataclass(frozen=True)
class YesNo:
    """A statement that holds or does not."""

    statement: str

    def text(self, value: Any, _terms: Terms) -> str:
        return "yes" if value else "no"

    def read(self, text: str, _terms: Terms) -> bool:
        if text.strip().lower() not in ("yes", "no"):
            raise UserError("Enter yes or no.")
        return text.strip().lower() == "yes"


@dataclass(frozen=True)
class Several:
    """Any number of the options, in their order."""

    options: Callable[[Layout], Sequence[Option]]
    nothing: str

    def text(self, value: Any, terms: Terms) -> str:
        chosen = [w for v, w in self.options(terms.layout) if v in (value or ())]
        return ", ".join(chosen)

    def read(self, text: str, terms: Terms) -> tuple[Any, ...]:
        raise UserError(f"“{text}” is none of the choices.")


@dataclass(frozen=True)
class Column:
    """One column of a table: dotted name within a row, heading, kind."""

    path: str
    heading: str
    kind: Kind
    tip: str = ""
    #: In steps of 4 px.
    width: int = 16
    #: (row, value) → row, where more than the value itself changes.
    change: Callable[[Any, Any], Any] | None = None


@dataclass(frozen=True)
class Rows:
    """A table: a tuple of values of the same make."""

    columns: tuple[Column, ...]
    #: A further row, behind the row of this index.
    further: Callable[[Layout, tuple[Any, ...], int], Any]
    fewest: int = 1
    row_name: str = "row"

    def text(self, value: Any, _terms: Terms) -> str:
        count = len(value or ())
        return f"{count} {self.row_name}{'' if count == 1 else 's'}"

    def read(self, text: str, _terms: Terms) -> Any:
        raise UserError(f"“{text}” cannot be entered here.")


def si_unit(kind: Kind) -> str:
    """The unit of a kind's values inside, or nothing where they have none."""
    if isinstance(kind, Distance | Distances):
        return "m"
    if isinstance(kind, FluxDensity):
        return "T"
    if isinstance(kind, Amount):
        named = [unit for unit, factor in kind.units.items() if factor == 1.0]
        return named[0] if named else "parts of one" if "%" in kind.units else ""
    return ""


def mixed_text(values: Sequence[Any], kind: Kind, terms: Terms) -> str:
    """What a field says of several items with different values.

    Examples
    --------
    >>> mixed_text([2.4, 3.0, 2.7], Distance(), Terms(Layout()))
    '3 values, 2.40–3.00 m'
    >>> mixed_text([-0.15, 0.05], Dimension(), Terms(Layout()))
    '2 values, −150 to 50 mm'
    >>> mixed_text(["a", "b", "a"], Words(), Terms(Layout()))
    '2 values'
    """
    distinct = list(dict.fromkeys(values))
    count = f"{len(distinct)} values"
    numbers = [v for v in distinct if isinstance(v, int | float)]
    if len(numbers) < len(distinct) or any(isinstance(v, bool) for v in distinct):
        return count
    low, high = (kind.text(f(numbers), terms) for f in (min, max))
    figures, _, unit = high.rpartition(" ")
    if figures:
        low = low.removesuffix(f" {unit}")
    # A dash between them would read as another minus.
    between = " to " if min(numbers) < 0 else "–"
    low, high = (text.replace("-", "−") for text in (low, high))
    return f"{count}, {low}{between}{high}"
