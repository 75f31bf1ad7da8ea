"""Compiles numeric functions, and keeps the machine code by what all of them say.

numba looks at the file of a function alone when it decides whether the machine code
that it kept is still true. What the function calls from other files is part of that
code, so that after an update old formulas could go on living in it. The folder here is
named by the text of all files with compiled functions: another text, another folder.
"""

from __future__ import annotations

import hashlib
import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any, TypeVar, cast

import numba
import platformdirs

import engine

Function = TypeVar("Function", bound=Callable[..., Any])

#: Packages whose files have compiled functions.
_PACKAGES = ("field", "certified")

#: Folders of other texts that are left, the newest: an older program may still run.
_KEPT = 4


def folder_of(base: Path, sources: Path) -> Path:
    """Where the machine code of the files in `sources` is kept, under `base`."""
    digest = hashlib.sha256(engine.__version__.encode())
    for package in _PACKAGES:
        for path in sorted((sources / package).glob("*.py")):
            digest.update(path.name.encode() + b"\0" + path.read_bytes())
    return base / digest.hexdigest()[:16]


def drop_old(folder: Path) -> None:
    """Remove what was kept beside `folder`, but for the newest few."""
    try:
        others = sorted(
            (path for path in folder.parent.iterdir() if path != folder),
            key=lambda path: path.stat().st_mtime,
        )
    except OSError:
        return
    for path in others[:-_KEPT]:
        shutil.rmtree(path, ignore_errors=True)


def _keep() -> None:
    # What numba takes from the environment, as of its names in capitals.
    chosen = getattr(numba.config, "CACHE_DIR", "")
    base = Path(chosen or platformdirs.user_cache_dir("lodestead")) / "compiled"
    folder = folder_of(base, Path(__file__).parent)
    if not folder.exists():
        drop_old(folder)
    setattr(numba.config, "CACHE_DIR", str(folder))  # noqa: B010


_keep()


def compiled(function: Function) -> Function:
    """Compile a function that runs without Python's lock.

    As in arrays x / 0 is ±inf or nan there, not an error: the caller sees to it.
    """
    made = numba.njit(nogil=True, cache=True, error_model="numpy")(function)
    return cast(Function, made)


def contracted(function: Function) -> Function:
    """As `compiled`; a product and the sum that takes it may be rounded once."""
    made = numba.njit(
        nogil=True, cache=True, error_model="numpy", fastmath={"contract"}
    )(function)
    return cast(Function, made)
