"""Every outside check says where its expected values come from.

Each test in ``tests/reference/`` carries ``@pytest.mark.source("…")`` (or its module does, as
``pytestmark``): a publication, a standard, a table, a reference library with what it computes;
else the words "common practice" or "from memory". The list is printed by
``python -m tests.reference.test_outside_checks`` and by ``pytest -rA`` of the test below.
"""

from __future__ import annotations

import ast
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

import pytest

HERE = Path(__file__).resolve().parent
SHORTEST_SOURCE = 10


@dataclass(frozen=True)
class OutsideCheck:
    """A test that compares with something outside the project, and with what."""

    test: str
    sources: tuple[str, ...]


def constants(tree: ast.Module) -> dict[str, str]:
    """Return the texts that a module gives a name to."""
    return {
        ast.unparse(statement.targets[0]): statement.value.value
        for statement in tree.body
        if isinstance(statement, ast.Assign)
        and isinstance(statement.value, ast.Constant)
        and isinstance(statement.value.value, str)
    }


def marked_sources(nodes: list[ast.expr], named: dict[str, str]) -> tuple[str, ...]:
    """Return the texts of all ``pytest.mark.source`` among decorators or marks."""
    calls = [
        call
        for node in nodes
        for call in ast.walk(node)
        if isinstance(call, ast.Call) and ast.unparse(call.func) == "pytest.mark.source"
    ]
    return tuple(
        named.get(ast.unparse(call.args[0])) or str(ast.literal_eval(call.args[0]))
        for call in calls
    )


def outside_checks(path: Path, source: str) -> Iterator[OutsideCheck]:
    """Yield the tests of a file with the sources they, their class or their module name."""
    tree = ast.parse(source)
    named = constants(tree)
    module = [
        statement.value
        for statement in tree.body
        if isinstance(statement, ast.Assign) and ast.unparse(statement.targets[0]) == "pytestmark"
    ]
    waiting: list[tuple[ast.stmt, list[ast.expr]]] = [(node, module) for node in tree.body]
    while waiting:
        node, marks = waiting.pop(0)
        if isinstance(node, ast.ClassDef):
            waiting = [(member, [*marks, *node.decorator_list]) for member in node.body] + waiting
        elif isinstance(node, ast.FunctionDef) and node.name.startswith("test_"):
            sources = marked_sources([*marks, *node.decorator_list], named)
            yield OutsideCheck(test=f"{path.name}::{node.name}", sources=sources)


def all_outside_checks() -> list[OutsideCheck]:
    """Return every outside check of the folder, this file left out."""
    return [
        check
        for path in sorted(HERE.rglob("test_*.py"))
        if path != Path(__file__).resolve()
        for check in outside_checks(path, path.read_text(encoding="utf-8"))
    ]


def test_every_outside_check_names_its_source() -> None:
    checks = all_outside_checks()
    for check in checks:
        print(f"{check.test}: {'; '.join(check.sources)}")
    assert len(checks) > 10
    assert [check.test for check in checks if not check.sources] == []
    texts = {text for check in checks for text in check.sources}
    assert [text for text in texts if len(text) < SHORTEST_SOURCE] == []


@pytest.mark.parametrize(
    ("text", "sources"),
    [
        ("def test_a(): ...", ()),
        (
            '@pytest.mark.source("Author 1999, table 2")\ndef test_a(): ...',
            ("Author 1999, table 2",),
        ),
        ('pytestmark = pytest.mark.source("a book")\ndef test_a(): ...', ("a book",)),
        ('pytestmark = [pytest.mark.slow, pytest.mark.source("x")]\ndef test_a(): ...', ("x",)),
        ('BOOK = "a book"\n@pytest.mark.source(BOOK)\ndef test_a(): ...', ("a book",)),
        ('@pytest.mark.source("y")\nclass TestA:\n    def test_b(self): ...', ("y",)),
    ],
)
def test_sources_are_read(text: str, sources: tuple[str, ...]) -> None:
    (check,) = outside_checks(Path("test_x.py"), text)
    assert check.sources == sources


if __name__ == "__main__":
    for found in all_outside_checks():
        print(f"{found.test}: {'; '.join(found.sources) or 'NO SOURCE'}")
