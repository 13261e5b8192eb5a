"""The architecture is a failing check, not a drawing."""

from __future__ import annotations

import ast
import importlib
import shutil
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from tests import house_checks as house

PACKAGE = house.python_files("georoute")
TESTS = house.python_files("tests")
SCRIPTS = house.python_files("data")
HEAVY = {
    "folium",
    "geopandas",
    "holidays",
    "numba",
    "osmium",
    "osmnx",
    "pandas",
    "pyogrio",
    "pyproj",
    "scipy",
    "shapely",
    "sklearn",
}
TOP_LEVEL = {
    "DEVELOPERS.md",
    "LICENSE",
    "README.md",
    "data",
    "georoute",
    "maps",
    "pyproject.toml",
    "tests",
}
BINARY = {".pbf", ".gpkg", ".xlsx", ".png", ".jpg", ".webp", ".woff2", ".ico", ".gz", ".zip"}


def breaches(files: list[Path], check: Callable[[str], list[str]]) -> list[str]:
    return [
        f"{path.relative_to(house.ROOT)}: {breach}"
        for path in files
        for breach in check(path.read_text(encoding="utf-8"))
    ]


def test_there_is_something_to_check() -> None:
    assert len(PACKAGE) > 20
    assert len(TESTS) > 5
    assert SCRIPTS


def test_files_are_short() -> None:
    def too_long(source: str) -> list[str]:
        lines = len(source.splitlines())
        return [f"{lines} lines"] if lines > house.FILE_LINES else []

    assert breaches(PACKAGE + TESTS + SCRIPTS, too_long) == []


def test_functions_are_short() -> None:
    assert breaches(PACKAGE + TESTS + SCRIPTS, house.long_functions) == []


def test_public_functions_that_raise_say_so() -> None:
    # A command's docstring is its help text, and the exit codes have a table of their own.
    files = [path for path in PACKAGE if path.parent.name != "cli"]
    assert breaches(files, house.undocumented_raises) == []


def test_public_names_are_exported() -> None:
    public = [path for path in PACKAGE if not path.name.startswith("_")]
    assert breaches(public, house.unexported) == []


def test_the_public_api_is_sorted_and_all_of_it_is_there() -> None:
    package = importlib.import_module("georoute")
    names = package.__all__
    assert list(names) == sorted(names)
    assert [name for name in names if not hasattr(package, name)] == []
    assert set(names) <= set(dir(package))


def test_every_name_in_an_all_exists() -> None:
    for path in PACKAGE:
        names = house.exported(ast.parse(path.read_text(encoding="utf-8")))
        parts = path.relative_to(house.ROOT).with_suffix("").parts
        module = ".".join(part for part in parts if part != "__init__")
        for name in names or []:
            assert hasattr(importlib.import_module(module), name), f"{module} lacks {name}"


def test_lint_and_type_exceptions_have_a_code_and_a_reason() -> None:
    assert breaches(PACKAGE + TESTS + SCRIPTS, house.bare_exceptions_to_rules) == []


def test_arithmetic_is_strict() -> None:
    assert breaches(PACKAGE, house.fast_math) == []


@pytest.mark.parametrize(
    ("library", "rooms"),
    [
        ("numba", {"kernels"}),
        ("geopandas", {"register", "roads", "measure", "split", "store", "publishing"}),
    ],
)
def test_libraries_stay_in_their_rooms(library: str, rooms: set[str]) -> None:
    users = {
        path.relative_to(house.ROOT).parts[1].removesuffix(".py")
        for path in PACKAGE
        if library in house.imported_modules(path.read_text(encoding="utf-8"))
    }
    assert users <= rooms


def test_the_layers_hold() -> None:
    program = shutil.which("lint-imports", path=str(Path(sys.executable).parent))
    assert program, "import-linter is not installed; install the extra 'dev'"
    done = subprocess.run(
        [program, "--no-cache"], cwd=house.ROOT, capture_output=True, text=True, check=False
    )
    assert done.returncode == 0, done.stdout + done.stderr


@pytest.mark.parametrize(
    "command",
    [["-c", "import georoute; dir(georoute)"], ["-m", "georoute", "--help"]],
    ids=["import", "help"],
)
def test_nothing_heavy_is_loaded_before_it_is_used(command: list[str]) -> None:
    done = subprocess.run(
        [sys.executable, "-X", "importtime", *command],
        cwd=house.ROOT,
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    lines = [line for line in done.stderr.splitlines() if line.startswith("import time:")]
    loaded = {line.rpartition("|")[2].strip().partition(".")[0] for line in lines}
    assert "georoute" in loaded
    assert loaded & HEAVY == set()


def test_the_top_level_is_tidy() -> None:
    names = {path.relative_to(house.ROOT).parts[0] for path in house.repository_files()}
    assert {name for name in names if not name.startswith(".")} - TOP_LEVEL == set()
    assert ".ci" in names


def test_texts_speak_only_of_the_product() -> None:
    texts = [path for path in house.repository_files() if path.suffix not in BINARY]
    # The Leaflet assets are other people's files, kept byte for byte.
    own = [path for path in texts if not path.name.endswith((".min.js", ".min.css"))]
    assert breaches(own, house.forbidden_words) == []
