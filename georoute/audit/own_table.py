"""The user's own travel table, read again with nothing but the csv module."""

from __future__ import annotations

import csv
import math
from io import StringIO
from pathlib import Path
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    from georoute.audit.report import Report

__all__ = ["OwnTable"]

SECONDS, METRES = "drive_s", "dist_m"

Pair = tuple[str, str]


def _rows(path: Path) -> tuple[list[list[str]], bool]:
    """Return the rows of a CSV, and whether it writes decimals with a comma."""
    text = path.read_text(encoding="utf-8-sig")
    head = text.partition("\n")[0]
    delimiter = max(",;\t", key=head.count)
    rows = [row for row in csv.reader(StringIO(text, newline=""), delimiter=delimiter) if row]
    return rows, delimiter == ";"


def _figure(text: str, *, comma: bool) -> float:
    bare = text.strip()
    return float(bare.replace(",", ".") if comma else bare) if bare else math.inf


def _long(rows: list[list[str]], column: str, *, comma: bool) -> dict[Pair, float]:
    header = [name.strip() for name in rows[0]]
    at, to, value = (header.index(name) for name in ("from_id", "to_id", column))
    return {
        (row[at].strip(), row[to].strip()): _figure(row[value], comma=comma) for row in rows[1:]
    }


def _square(path: Path) -> dict[Pair, float]:
    rows, comma = _rows(path)
    ids = [name.strip() for name in rows[0][1:]]
    return {
        (row[0].strip(), to_id): _figure(cell, comma=comma)
        for row in rows[1:]
        for to_id, cell in zip(ids, row[1:], strict=True)
    }


def _files(path: Path) -> tuple[Path, Path]:
    """Return the square files of seconds and metres that ``path`` stands for."""
    if path.is_dir():
        return path / f"{SECONDS}.csv", path / f"{METRES}.csv"
    if SECONDS in path.name:
        return path, path.with_name(path.name.replace(SECONDS, METRES))
    return path.with_name(path.name.replace(METRES, SECONDS)), path


def _read(path: Path) -> tuple[Mapping[Pair, float], Mapping[Pair, float]]:
    if path.is_file():
        rows, comma = _rows(path)
        if "to_id" in [name.strip() for name in rows[0]]:
            return _long(rows, SECONDS, comma=comma), _long(rows, METRES, comma=comma)
    seconds, metres = _files(path)
    return _square(seconds), _square(metres)


class OwnTable:
    """Seconds and metres by pairs of ids."""

    def __init__(self, seconds: Mapping[Pair, float], metres: Mapping[Pair, float]) -> None:
        self._seconds = seconds
        self._metres = metres

    @classmethod
    def find(cls, path: str | None, *, beside: str, report: Report) -> OwnTable | None:
        """Read the table at ``path``, also relative to the programme file it is ``beside``.

        Where that cannot be done, say so in the report and return ``None``.
        """
        given = Path(path or "")
        for place in (given, Path(beside).parent / given):
            if path and place.exists():
                try:
                    return cls(*_read(place))
                except (OSError, ValueError, IndexError, csv.Error) as error:
                    reason = f"cannot be read ({error})"
                    break
        else:
            reason = "is not there"
        report.warning(
            "table_missing",
            f"The travel table {path} {reason}; the legs were not checked against it.",
            remedy="Put the table back where it was at planning and check again.",
            file=str(path or ""),
        )
        return None

    def leg(self, from_id: str, to_id: str) -> tuple[float, float]:
        """Return seconds and metres; staying where one is takes none, an absent pair is no way."""
        pair = (from_id.strip(), to_id.strip())
        absent = 0.0 if from_id == to_id else math.inf
        return self._seconds.get(pair, absent), self._metres.get(pair, absent)
