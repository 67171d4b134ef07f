"""Each contract on imports is broken once, in a copy of the package, and has to notice."""

import shutil
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
LINT = "from importlinter.cli import lint_imports_command as run; run(['--no-logo', '--no-cache'])"
CORE = "The core is arithmetic"
DOWN = "Imports run downwards"
PLANTED = [
    ("base/planted.py", "import creditdesk.formula", DOWN),
    ("statements/planted.py", "import creditdesk.case", DOWN),
    ("memo/planted.py", "import creditdesk.desk", DOWN),
    ("sideboard/__init__.py", "", DOWN),
    ("model/planted.py", "import pathlib", CORE),
    ("ratios/planted.py", "import pandas", CORE),
    ("flow/planted.py", "import time", CORE),
    ("cli/planted.py", "import PySide6.QtWidgets", "Qt only in desk"),
    ("memo/planted.py", "import PySide6.QtCore", "Qt only in desk"),
    ("desk/planted.py", "import sqlite3", "SQLite only"),
    ("case/planted.py", "import sqlite3", "SQLite only"),
    ("desk/planted.py", "import creditdesk.model.fit", "Fitting only"),
    ("model/planted.py", "import creditdesk.model.fit", "Fitting only"),
]
ALLOWED = [
    ("desk/planted.py", "import PySide6.QtWidgets"),
    ("cli/planted.py", "import creditdesk.desk.planted_elsewhere"),
    ("case/schema.py", "import sqlite3"),
    ("cli/planted.py", "import creditdesk.model.fit"),
]


@pytest.fixture
def copy(tmp_path: Path) -> Path:
    shutil.copytree(ROOT / "creditdesk", tmp_path / "creditdesk", ignore=shutil.ignore_patterns("__pycache__"))
    shutil.copy(ROOT / "pyproject.toml", tmp_path)
    return tmp_path


def _lint(folder: Path) -> tuple[int, str]:
    done = subprocess.run([sys.executable, "-c", LINT], cwd=folder, capture_output=True, text=True, check=False)
    return done.returncode, done.stdout + done.stderr


def _plant(folder: Path, name: str, line: str) -> None:
    path = folder / "creditdesk" / name
    path.parent.mkdir(exist_ok=True)
    (path.parent / "__init__.py").touch()
    path.write_text(f'"""Planted."""\n\n{line}\n')


@pytest.mark.parametrize(("name", "line", "contract"), PLANTED)
def test_a_planted_import_breaks_its_contract(copy: Path, name: str, line: str, contract: str) -> None:
    _plant(copy, name, line)
    code, said = _lint(copy)
    assert code == 1
    broken = [line for line in said.splitlines() if " BROKEN" in line]
    assert any(line.startswith(contract) for line in broken), said


@pytest.mark.parametrize(("name", "line"), ALLOWED)
def test_what_is_allowed_breaks_none(copy: Path, name: str, line: str) -> None:
    _plant(copy, name, line)
    code, said = _lint(copy)
    assert code == 0, said
