"""Files written whole or not at all."""

from __future__ import annotations

import contextlib
import os
import secrets
from pathlib import Path

from engine.errors import UserError


def write_file(path: Path | str, content: bytes) -> None:
    """Write a file beside its place and move it there in one step.

    A file that was there gives its permissions to the new one; where `path` is a
    link, what it points to is replaced.

    Raises
    ------
    UserError
        When it cannot be written; a file that was there stays as it was.
    """
    name = Path(path).name
    try:
        target = Path(os.path.realpath(path))
        if target.is_dir():
            raise UserError(
                f"{name} was not written: it is a folder. Choose another name."
            )
        if target.exists() and not os.access(target, os.W_OK):
            raise UserError(
                f"{name} was not written: the file there is write-protected. Choose "
                "another name, or allow writing."
            )
        _replace(target, content)
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise UserError(
            f"{name} was not written: {reason}. Choose a folder that exists and "
            "that you may write to, and try again."
        ) from error


def _replace(target: Path, content: bytes) -> None:
    beside = target.with_name(f".{target.name[:60]}.{secrets.token_hex(6)}.part")
    flags = os.O_WRONLY | os.O_CREAT | os.O_EXCL | getattr(os, "O_BINARY", 0)
    descriptor = os.open(beside, flags, 0o666)
    try:
        with os.fdopen(descriptor, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        if target.exists():
            beside.chmod(target.stat().st_mode & 0o7777)
        os.replace(beside, target)
    except BaseException:
        with contextlib.suppress(OSError):
            beside.unlink()
        raise
    _sync_folder(target.parent)


def _sync_folder(folder: Path) -> None:
    """Make the new name last through a loss of power, where folders allow it."""
    if os.name != "posix":
        return
    with contextlib.suppress(OSError):
        descriptor = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(descriptor)
        finally:
            os.close(descriptor)
