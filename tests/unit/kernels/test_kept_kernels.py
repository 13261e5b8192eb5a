"""Compiled kernels are kept by what they depend on: no more is compiled again than must be."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from pathlib import Path

import pytest

from georoute.kernels import _jit

ROOM = Path(_jit.__file__).parent


@pytest.fixture
def copied(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Iterator[Path]:
    """A copy of the kernels' sources that the fingerprints are taken of."""
    for source in ROOM.glob("*.py"):
        shutil.copy(source, tmp_path)
    monkeypatch.setattr(_jit, "_HERE", tmp_path)
    for function in (_jit._sources, _jit._fingerprint):
        function.cache_clear()
    yield tmp_path
    for function in (_jit._sources, _jit._fingerprint):
        function.cache_clear()


def fingerprints() -> dict[str, str]:
    for function in (_jit._sources, _jit._fingerprint):
        function.cache_clear()
    return {name: _jit._fingerprint(name) for name in ("clock", "annealing", "geodesic")}


@pytest.mark.parametrize(
    ("edited", "changed"),
    [
        ("annealing", {"annealing"}),
        ("windowed_rows", {"annealing"}),
        ("clock", {"clock", "annealing"}),
        ("_jit", {"clock", "annealing", "geodesic"}),
        ("detour", set()),
    ],
)
def test_an_edit_reaches_those_that_call_it_and_no_others(
    copied: Path, edited: str, changed: set[str]
) -> None:
    before = fingerprints()
    with (copied / f"{edited}.py").open("a") as source:
        source.write("\n# one line more\n")
    after = fingerprints()
    assert {name for name in before if before[name] != after[name]} == changed


def test_every_import_of_a_kernel_module_is_seen() -> None:
    """The fingerprints read imports by their form: there is no other form in the room."""
    for source in ROOM.glob("*.py"):
        lines = [line.strip() for line in source.read_text().splitlines()]
        imports = [line for line in lines if "georoute.kernels" in line and "import" in line]
        for line in imports:
            name = line.split()[1].rpartition(".")[2]
            assert name in _jit._sources(source.stem) or line.startswith('"""')
