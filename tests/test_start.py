"""`packaging/start.py` on machines that are not ready: sentences, no tracebacks."""

from __future__ import annotations

import ast
import importlib.util
from pathlib import Path

import pytest

PATH = Path(__file__).parents[1] / "packaging" / "start.py"


@pytest.fixture
def start():
    spec = importlib.util.spec_from_file_location("start", PATH)
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def test_an_old_python_is_told_which_one_is_needed(start):
    with pytest.raises(start.Stopped, match=r"needs Python 3\.11 .* Python 3\.9"):
        start.check_python((3, 9, 2))


def test_an_old_python_can_read_the_program():
    ast.parse(PATH.read_text(encoding="utf-8"), feature_version=(3, 7))


def test_a_wrong_word_is_answered_by_a_sentence(start, capsys):
    assert start.main(["tset"]) == 2
    assert "'tset' is not understood" in capsys.readouterr().err


def test_pip_that_fails_is_explained(start, tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(start, "ENVIRONMENT", str(tmp_path / "venv"))
    monkeypatch.setattr(start, "make_venv", lambda: None)
    monkeypatch.setattr(start.subprocess, "call", lambda *_, **__: 1)
    assert start.main(["--", "assess"]) == 2
    assert "there is no network" in capsys.readouterr().err


def test_a_missing_venv_module_is_named(start, tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(start, "ENVIRONMENT", str(tmp_path / "venv"))
    monkeypatch.setattr(start, "is_debian", lambda: False)
    monkeypatch.setattr(start.subprocess, "call", lambda *_, **__: 1)
    assert start.main([]) == 2
    assert "python3-venv" in capsys.readouterr().err


def test_missing_libraries_are_named_to_a_user_who_may_not_install(
    start, monkeypatch, capsys
):
    monkeypatch.setattr(
        start, "missing_libraries", lambda: [("xcb-cursor", ["libxcb-cursor0"])]
    )
    monkeypatch.setattr(start, "is_debian", lambda: True)
    monkeypatch.setattr(start, "is_root", lambda: False)
    start.provide_libraries()
    assert "sudo apt-get install libxcb-cursor0" in capsys.readouterr().out


def test_constraints_hold_no_address():
    text = (PATH.parent / "constraints.txt").read_text(encoding="utf-8")
    assert "://" not in text
    assert "@" not in text
