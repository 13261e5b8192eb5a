"""Find the line of a key in a TOML text; the library that parses it does not keep them."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterator

__all__ = ["KeyLines"]

_PART = r"""(?:[A-Za-z0-9_-]+|"[^"\n]*"|'[^'\n]*')"""
_KEY = rf"{_PART}(?:\s*\.\s*{_PART})*"
_TABLES = re.compile(rf"\s*\[\[\s*({_KEY})\s*\]\]")
_TABLE = re.compile(rf"\s*\[\s*({_KEY})\s*\]")
_PAIR = re.compile(rf"\s*({_KEY})\s*=(.*)", re.DOTALL)
_TOKEN = re.compile(r"""\"\"\"|'''|"(?:\\.|[^"\\\n])*"|'[^'\n]*'|\#.*|[\[\]{}]""")

Path = tuple[str | int, ...]


def _parts(key: str) -> tuple[str, ...]:
    return tuple(part.strip("\"'") for part in re.findall(_PART, key))


class KeyLines:
    """Lines of keys, counted from 1; paths are keys, and positions from 0 in arrays of tables.

    Only what stands at the start of a line is seen; a key inside braces or an element of a list
    has the line of the key that holds it.
    """

    def __init__(self, text: str) -> None:
        self._lines: dict[Path, int] = {}
        self._counts: dict[Path, int] = {}
        table: Path = ()
        for number, line in _statements(text):
            if match := _TABLES.match(line):
                *parents, last = _parts(match[1])
                path = (*self._resolved(tuple(parents)), last)
                self._counts[path] = self._counts.get(path, -1) + 1
                table = (*path, self._counts[path])
                self._lines.setdefault(path, number)
                self._lines[table] = number
            elif match := _TABLE.match(line):
                table = self._resolved(_parts(match[1]))
                self._lines.setdefault(table, number)
            elif match := _PAIR.match(line):
                path = table
                for part in _parts(match[1]):
                    path = (*path, part)
                    self._lines.setdefault(path, number)

    def _resolved(self, keys: tuple[str, ...]) -> Path:
        path: Path = ()
        for key in keys:
            path = (*path, key)
            if path in self._counts:
                path = (*path, self._counts[path])
        return path

    def line_of(self, path: Path) -> int | None:
        """Return the line of a key, else of what holds it; ``None`` where neither is seen."""
        while path:
            if path in self._lines:
                return self._lines[path]
            path = path[:-1]
        return None


def _statements(text: str) -> Iterator[tuple[int, str]]:
    """Yield the lines that begin a statement, passing over the insides of long values."""
    fence, depth = "", 0
    for number, line in enumerate(text.split("\n"), start=1):
        rest = line
        if fence:
            _, found, rest = line.partition(fence)
            if not found:
                continue
            fence = ""
        elif depth == 0:
            yield number, line
            if _TABLE.match(line) or _TABLES.match(line):
                continue
        fence, change = _open_ends(rest)
        depth = max(0, depth + change)


def _open_ends(text: str) -> tuple[str, int]:
    """Return the fence of a string left open at the end of a line, and the change of depth."""
    position, depth = 0, 0
    while match := _TOKEN.search(text, position):
        mark, position = match[0], match.end()
        if mark in ('"""', "'''"):
            end = text.find(mark, position)
            if end < 0:
                return mark, depth
            position = end + len(mark)
        elif mark in "[{":
            depth += 1
        elif mark in "]}":
            depth -= 1
    return "", depth
