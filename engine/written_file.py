"""Files written whole or not at all."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from engine.errors import UserError


def write_file(path: Path | str, content: bytes) -> None:
    """Write a file beside its place and move it there in one step.

    Raises
    ------
    UserError
        When it cannot be written; a file that was there stays as it was.
    """
    target = Path(path)
    temporary: str | None = None
    try:
        handle, temporary = tempfile.mkstemp(
            dir=target.parent, prefix=f".{target.name[:80]}.", suffix=".part"
        )
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(temporary, 0o666 & ~_umask())
        os.replace(temporary, target)
    except OSError as error:
        if temporary is not None:
            Path(temporary).unlink(missing_ok=True)
        reason = error.strerror or str(error)
        raise UserError(
            f"{target.name} was not written: {reason}. Choose a folder that exists and "
            "that you may write to, and try again."
        ) from error


def _umask() -> int:
    """The permissions that new files do not get (asking means setting it)."""
    mask = os.umask(0o022)
    os.umask(mask)
    return mask
