"""What every item of a layout has: an id, a name, a note, and origins of its values.

A layout is made of frozen values. They are read from files by msgspec, which checks
types and the ranges stated here; `edits.checked` applies the same checks to a value
made in the program.
"""

from __future__ import annotations

from typing import Annotated, Literal

from msgspec import Meta, Struct

# The last group of the patterns: Python's "$" alone lets a line end through.
Id = Annotated[
    str,
    Meta(
        min_length=1,
        max_length=80,
        pattern=r"^[A-Za-z0-9][A-Za-z0-9_.:+\- ]*$(?!\n)",
        description="an id: a letter or digit, then letters, digits, spaces, _ . : + -",
    ),
]
Digest = Annotated[
    str,
    Meta(
        pattern=r"^([0-9a-f]{64})?$(?!\n)",
        description="a SHA-256 of 64 lower-case hexadecimal digits, or empty text",
    ),
]
Name = Annotated[str, Meta(max_length=400)]
Text = Annotated[str, Meta(max_length=20_000)]
Label = Annotated[str, Meta(min_length=1, max_length=40)]

#: ±100 km, so that long straight lines can be checked. [m]
Coordinate = Annotated[float, Meta(ge=-1e5, le=1e5)]
Point2 = tuple[Coordinate, Coordinate]
Point3 = tuple[Coordinate, Coordinate, Coordinate]
Outline = Annotated[tuple[Point2, ...], Meta(min_length=3, max_length=1000)]
Length = Annotated[float, Meta(gt=0, le=1e5)]
Distance = Annotated[float, Meta(ge=0, le=1e5)]
Degrees = Annotated[float, Meta(ge=-36_000, le=36_000)]
Amperes = Annotated[float, Meta(ge=0, le=1e9)]
Volts = Annotated[float, Meta(gt=0, le=1e7)]
Hertz = Annotated[float, Meta(ge=0, le=1e6)]


class Value(Struct, frozen=True, kw_only=True, forbid_unknown_fields=True):
    """A frozen part of an item, compared by what it holds."""


class ValueOrigin(Value, frozen=True, kw_only=True):
    """Where one entered value of an item comes from.

    A value without an origin is an assumption; `assumed` says so with a reason.
    """

    #: Name of the field, dotted for parts: "demand.rms".
    field: Name
    kind: Literal["assumed", "document", "measured", "confirmed"]
    #: Id of a source document, and where in it.
    document: Id | None = None
    page: Name = ""
    #: Date of the measurement or confirmation, as the user writes it.
    date: Name = ""
    instrument: Name = ""
    by: Name = ""
    note: Text = ""


class Item(Value, frozen=True, kw_only=True):
    """Anything that a user can edit; `id` is readable and unique in its layout."""

    id: Id
    name: Name = ""
    note: Text = ""
    origins: tuple[ValueOrigin, ...] = ()

    @property
    def title(self) -> str:
        """What a person calls the item."""
        return self.name or self.id


class SourceDocument(Item, frozen=True, kw_only=True):
    """A drawing, schedule or survey that values of the layout were taken from."""

    file_name: Name = ""
    revision: Name = ""
    date: Name = ""
    sha256: Digest = ""


class IssuedResult(Value, frozen=True, kw_only=True):
    """A result as it was issued: the largest value, or a comparison with a level."""

    #: Id of the zone or receptor, and of the load case.
    place: Id
    case: Id
    #: Id of the level; empty: the RMS resultant without any level.
    level: Name = ""
    #: "AC", "DC", or empty where nothing was compared.
    kind: Name = ""
    #: [T]
    value: float | None = None
    ratio: float | None = None
    state: Name = ""


class IssuedRevision(Item, frozen=True, kw_only=True):
    """A revision that left the house: digests tie it to its layout and results."""

    revision: Name
    date: Name
    layout_digest: Name
    results_digest: Name
    program_version: Name
    #: What was issued, so that a later program can be held against it.
    results: Annotated[tuple[IssuedResult, ...], Meta(max_length=200_000)] = ()


class ConfirmedRemark(Item, frozen=True, kw_only=True):
    """A remark that a named person has looked at and lets stand."""

    #: Code of the remark, as `remarks` prints it.
    code: Name
    items: tuple[Id, ...] = ()
    by: Name = ""
    date: Name = ""


class TitleData(Item, frozen=True, kw_only=True):
    """What stands in the title block of every page."""

    project: Name = ""
    client: Name = ""
    document_number: Name = ""
    revision: Name = ""
    status: Name = ""
    date: Name = ""
    prepared_by: Name = ""
    checked_by: Name = ""
    approved_by: Name = ""
    #: The question that the calculation answers.
    question: Text = ""
    scope: Text = ""
    conclusions: Text = ""
    #: What is left out on purpose, beside what the program never models.
    exclusions: Text = ""
    #: The house that issues the document: name and address, under the logo.
    letterhead: Text = ""
    #: A PNG or JPEG picture (base64) at the head of the first page; empty: none.
    logo: Annotated[str, Meta(max_length=4_000_000)] = ""
    #: Why those who sign are competent, in their words.
    competence: Text = ""
    #: A text of the house before the signatures: terms, distribution, thanks.
    closing: Text = ""
