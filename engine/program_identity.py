"""Which program computed: its version, a digest of its source, the commit if known."""

from __future__ import annotations

import hashlib
import re
from dataclasses import dataclass
from functools import cache
from pathlib import Path

import engine

_COMMIT = re.compile(r"^[0-9a-f]{40}$")


@dataclass(frozen=True)
class ProgramIdentity:
    """Which program computed.

    Attributes
    ----------
    version : str
    source_digest : str
        SHA-256 over names and contents of the engine's Python files; empty: not known.
    commit : str
        Of the repository that the program runs from; empty: not known.
    """

    version: str = engine.__version__
    source_digest: str = ""
    commit: str = ""

    def sentence(self) -> str:
        """The identity in words."""
        text = f"Lodestead {self.version}"
        if self.source_digest:
            text += f", source digest (SHA-256) {self.source_digest[:16]}…"
        return text + (f", commit {self.commit}" if self.commit else "")


@cache
def program_identity() -> ProgramIdentity:
    """The identity of this program, read from its own files."""
    folder = Path(engine.__file__).parent
    digest = hashlib.sha256()
    try:
        for path in sorted(folder.rglob("*.py")):
            digest.update(path.relative_to(folder).as_posix().encode())
            digest.update(b"\0")
            digest.update(path.read_bytes().replace(b"\r\n", b"\n"))
            digest.update(b"\0")
    except OSError:
        return ProgramIdentity()
    return ProgramIdentity(
        source_digest=digest.hexdigest(), commit=_commit(folder.parent / ".git")
    )


def _commit(repository: Path) -> str:
    """The commit that a repository's folder names as checked out, or nothing."""
    try:
        head = (repository / "HEAD").read_text(encoding="ascii").strip()
        if head.startswith("ref: "):
            name = head.removeprefix("ref: ")
            loose = repository / name
            if loose.is_file():
                head = loose.read_text(encoding="ascii").strip()
            else:
                packed = (repository / "packed-refs").read_text(encoding="ascii")
                lines = [line.split(" ") for line in packed.splitlines()]
                head = next((x[0] for x in lines if x[-1] == name), "")
    except (OSError, UnicodeError):
        return ""
    return head if _COMMIT.match(head) else ""
