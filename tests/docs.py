"""The tables of README that are generated: ``python -m tests.docs --write`` renews them."""

from __future__ import annotations

import re
import sys
from collections.abc import Iterable
from pathlib import Path

from georoute.cli.exit_codes import MEANINGS
from georoute.register.columns import COLUMNS
from georoute.register.programme_fields import programme_fields

README = Path(__file__).parents[1] / "README.md"


def _table(header: tuple[str, ...], rows: Iterable[tuple[str, ...]]) -> str:
    def cell(text: str) -> str:
        return text.replace("|", "\\|").replace("\n", " ")

    lines = ["| " + " | ".join(header) + " |", "|" + "---|" * len(header)]
    lines += ["| " + " | ".join(cell(text) for text in row) + " |" for row in rows]
    return "\n".join(lines)


def columns_table() -> str:
    rows = [
        (f"`{column.name}`", ", ".join(f"`{alias}`" for alias in column.aliases), column.meaning)
        for column in COLUMNS
    ]
    return _table(("column", "also read as", "meaning"), rows)


def programme_table() -> str:
    rows = [
        (f"`{row.key}`", row.kind, f"`{row.default}`" if row.default else "", row.meaning)
        for row in programme_fields()
    ]
    return _table(("key", "kind", "default", "meaning"), rows)


def exit_code_table() -> str:
    rows = [(f"`{int(code)}`", meaning) for code, meaning in MEANINGS.items()]
    return _table(("code", "meaning"), rows)


TABLES = {
    "columns": columns_table,
    "programme": programme_table,
    "exit codes": exit_code_table,
}


def renewed(text: str) -> str:
    """Return README's text with every generated table made anew."""
    for name, make in TABLES.items():
        pattern = re.compile(rf"(<!-- table: {name} -->\n).*?(<!-- end -->)", re.DOTALL)
        assert len(pattern.findall(text)) == 1, f"README has no place for the table {name!r}"
        table = make()
        text = pattern.sub(lambda found, table=table: f"{found[1]}{table}\n{found[2]}", text)  # type: ignore[misc]  # the default binds the loop's value
    return text


def main() -> None:
    text = README.read_text("utf-8")
    fresh = renewed(text)
    if "--write" in sys.argv:
        README.write_text(fresh, "utf-8")
    sys.exit(0 if fresh == text or "--write" in sys.argv else 1)


if __name__ == "__main__":
    main()
