"""The lints run with the tests, so that one command tells whether the house is in order."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from tests import house_checks as house

pytestmark = pytest.mark.slow


def run(*command: str) -> tuple[int, str]:
    """Run a tool of this Python's own environment from the top of the repository."""
    program = Path(sys.executable).parent / command[0]
    done = subprocess.run(
        [str(program), *command[1:]], cwd=house.ROOT, capture_output=True, text=True, check=False
    )
    return done.returncode, done.stdout + done.stderr


@pytest.mark.parametrize(
    "command",
    [
        ("ruff", "check", "--no-cache", "."),
        ("ruff", "format", "--no-cache", "--check", "."),
        ("mypy",),
        ("mypy", "--explicit-package-bases", "data"),
    ],
    ids=["ruff check", "ruff format", "mypy", "mypy data"],
)
def test_lint(command: tuple[str, ...]) -> None:
    code, output = run(*command)
    assert code == 0, output


def test_docstrings_follow_numpydoc() -> None:
    files = [str(path) for path in house.python_files("georoute")]
    code, output = run("numpydoc", "lint", *files)
    assert code == 0, output
