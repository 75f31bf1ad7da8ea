"""Machine code is kept as long as all that it was made of says the same."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from pathlib import Path

import engine
from engine.compiled import drop_old, folder_of

SOURCES = Path(engine.__file__).parent

CALLED = (
    "from engine.compiled import compiled\n\n\n@compiled\ndef unit():\n    return {}\n"
)
CALLING = (
    "from engine.compiled import compiled\n"
    "from engine.field.called import unit\n\n\n"
    "@compiled\ndef twice():\n    return 2.0 * unit()\n"
)
ASK = "from engine.field.calling import twice; print(twice())"


def test_another_text_of_any_compiled_file_is_another_folder(tmp_path):
    for package in ("field", "certified"):
        (tmp_path / package).mkdir()
        (tmp_path / package / "a.py").write_text("a = 1")
    before = folder_of(Path("kept"), tmp_path)
    assert folder_of(Path("kept"), tmp_path) == before
    (tmp_path / "certified" / "a.py").write_text("a = 2")
    assert folder_of(Path("kept"), tmp_path) != before


def test_the_newest_folders_stay(tmp_path):
    for k in range(7):
        (tmp_path / str(k)).mkdir()
        os.utime(tmp_path / str(k), (k, k))
    drop_old(tmp_path / "new")
    assert sorted(path.name for path in tmp_path.iterdir()) == ["3", "4", "5", "6"]
    drop_old(tmp_path / "nowhere" / "new")


def test_what_calls_an_edited_function_is_compiled_anew(tmp_path):
    """numba alone would give the old number: the calling file is as it was."""
    package = tmp_path / "engine"
    (package / "field").mkdir(parents=True)
    for name in ("__init__.py", "compiled.py"):
        shutil.copy(SOURCES / name, package / name)
    (package / "field" / "__init__.py").touch()
    (package / "field" / "calling.py").write_text(CALLING)
    said = []
    for number in ("1.0", "5.0"):
        (package / "field" / "called.py").write_text(CALLED.format(number))
        surroundings = os.environ | {
            "PYTHONPATH": str(tmp_path),
            "NUMBA_CACHE_DIR": str(tmp_path / "kept"),
            "PYTHONDONTWRITEBYTECODE": "1",
        }
        done = subprocess.run(
            [sys.executable, "-c", ASK],
            cwd=tmp_path,
            env=surroundings,
            capture_output=True,
            text=True,
            check=True,
        )
        said.append(done.stdout.strip())
    assert said == ["2.0", "10.0"]
    assert len(list((tmp_path / "kept" / "compiled").iterdir())) == 2
