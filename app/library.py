"""A user's own reference levels and formations, kept for the next project.

One JSON file in the user's data folder; the same form goes from person to person. The
program puts nothing into it. A formation is kept without its circuits, and a level
without origins: both speak of one layout. An invented level also leaves its source.
"""

from __future__ import annotations

import json
from pathlib import Path
from typing import Annotated

import msgspec
import platformdirs
from msgspec import Meta
from msgspec.structs import replace

from engine.criteria import ReferenceLevel
from engine.edits import readable_id
from engine.errors import UserError
from engine.items import Name, Value
from engine.runs import FreeSection, Section
from engine.value_faults import faults, told
from engine.written_file import write_file

#: Largest file that is read. [bytes]
MAX_BYTES = 20_000_000

#: What marks the levels of the samples, in their name or source.
_INVENTED = "invented"


class Formation(Value, frozen=True, kw_only=True):
    """A section under a name, carrying no circuit yet."""

    name: Name
    section: Section


class Content(Value, frozen=True, kw_only=True):
    """What stands in a library file."""

    #: Version of the form.
    lodestead_library: Annotated[int, Meta(ge=1, le=1)] = 1
    levels: Annotated[tuple[ReferenceLevel, ...], Meta(max_length=1000)] = ()
    formations: Annotated[tuple[Formation, ...], Meta(max_length=1000)] = ()

    def with_level(self, level: ReferenceLevel) -> Content:
        """With a copy of a level; one of the same name is replaced."""
        others = tuple(held for held in self.levels if held.title != level.title)
        taken = {held.id for held in others}
        copy = replace(level_copy(level), id=readable_id(level.title, taken))
        return replace(self, levels=(*others, copy))

    def with_formation(self, name: str, section: Section) -> Content:
        """With a section under a name; one of the same name is replaced.

        Raises
        ------
        UserError
            When the name is empty.
        """
        if not name.strip():
            raise UserError("A formation needs a name to be kept under; type one.")
        others = tuple(held for held in self.formations if held.name != name.strip())
        kept = Formation(name=name.strip(), section=without_circuits(section))
        return replace(self, formations=(*others, kept))

    def without(self, *, level: str = "", formation: str = "") -> Content:
        """Without the level or the formation of this name."""
        return replace(
            self,
            levels=tuple(held for held in self.levels if held.title != level),
            formations=tuple(
                held for held in self.formations if held.name != formation
            ),
        )

    def merged(self, other: Content) -> Content:
        """With everything of another library; of two with one name, the other's."""
        found = self
        for level in other.levels:
            found = found.with_level(level)
        for formation in other.formations:
            found = found.with_formation(formation.name, formation.section)
        return found


def level_copy(level: ReferenceLevel) -> ReferenceLevel:
    """A level as it may leave its layout: no origins; an invented one has no source."""
    copy = replace(level, origins=())
    if _INVENTED in f"{level.name} {level.source}".lower():
        return replace(copy, source="", edition="", entered_by="")
    return copy


def without_circuits(section: Section) -> Section:
    """A section that carries nothing."""
    if isinstance(section, FreeSection):
        slots = tuple(replace(slot, loads=()) for slot in section.slots)
        return replace(section, slots=slots)
    return replace(section, circuits=())


def default_path() -> Path:
    """Where the library is kept."""
    folder = platformdirs.user_data_path("lodestead", appauthor=False)
    return folder / "library.json"


class Library:
    """The library on disk: read when asked, written whole."""

    def __init__(self, path: Path | None = None) -> None:
        self.path = path or default_path()

    def content(self) -> Content:
        """What is kept; nothing where there is no file yet.

        Raises
        ------
        UserError
            When the file cannot be read; it is left as it is.
        """
        return read(self.path) if self.path.exists() else Content()

    def keep(self, content: Content) -> None:
        """Write the library.

        Raises
        ------
        UserError
            When it cannot be written; the old one stays.
        """
        try:
            self.path.parent.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise UserError(
                f"The library was not written: the folder {self.path.parent} cannot be "
                f"made ({error.strerror})."
            ) from error
        write(self.path, content)


def read(path: Path) -> Content:
    """The library in a file.

    Raises
    ------
    UserError
        When it is none; every fault is named.
    """
    opening = f"{path.name} was not taken into the library"
    try:
        with path.open("rb") as file:
            data = file.read(MAX_BYTES + 1)
        if len(data) > MAX_BYTES:
            raise UserError(f"{opening}: it is larger than a library may be.")
        plain = json.loads(data.decode("utf-8-sig"))
    except OSError as error:
        raise UserError(f"{opening}: {error.strerror}.") from error
    except (ValueError, RecursionError) as error:
        raise UserError(f"{opening}: it is not JSON text in UTF-8.") from error
    if not isinstance(plain, dict) or "lodestead_library" not in plain:
        raise UserError(f"{opening}: it is not a library of levels and formations.")
    found = faults(Content, plain)
    if found:
        raise told(opening, found)
    content = msgspec.convert(plain, Content)
    # A file from elsewhere is held to the same rules as what is kept here.
    return Content().merged(content)


def write(path: Path, content: Content) -> None:
    """Write a library file.

    Raises
    ------
    UserError
        When it cannot be written.
    """
    plain = msgspec.to_builtins(content)
    plain["lodestead_library"] = 1
    text = json.dumps(plain, ensure_ascii=False, indent=1)
    write_file(path, (text + "\n").encode())
