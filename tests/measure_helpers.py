"""Places, travel settings, and travel tables with faults seeded on purpose.

The tables are written here by hand, cell by cell, without any code of the checker.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from georoute.domain.costs import Places
from georoute.domain.programme import DetourModel, TravelMethod, TravelSettings

HEADER = ["from_id", "to_id", "drive_s", "dist_m"]
METRES_PER_DEGREE = 111_000.0


def detour_model() -> DetourModel:
    return DetourModel(
        length_at_1km=1.8,
        length_exponent=0.93,
        time_at_1km_min=2.4,
        time_exponent=0.74,
        low_factor=0.73,
        high_factor=1.37,
    )


def settings(method: TravelMethod, *, table_path: str | None = None) -> TravelSettings:
    return TravelSettings(
        method=method, speed_kmh=36.0, circuity=1.4, detour=detour_model(), table_path=table_path
    )


def random_places(n: int, seed: int, *, spread_deg: float = 0.2) -> Places:
    """Return places around 30° S, 71° W, named so that text order is not number order."""
    rng = np.random.default_rng(seed)
    return Places(
        ids=tuple(f"P-{k}" for k in range(n)),
        lat_deg=-30.0 + rng.uniform(-spread_deg, spread_deg, n),
        lon_deg=-71.0 + rng.uniform(-spread_deg, spread_deg, n),
    )


def road_like(places: Places, seed: int) -> tuple[NDArray[np.float64], NDArray[np.float64]]:
    """Return clean seconds and metres: asymmetric, without triangle breaks, slow enough.

    A potential is added to one way and taken off the other: sums over triangles keep it.
    """
    rng = np.random.default_rng(seed)
    x = places.lon_deg * METRES_PER_DEGREE
    y = places.lat_deg * METRES_PER_DEGREE
    flat = np.abs(x[:, None] - x[None, :]) + np.abs(y[:, None] - y[None, :])
    dist = np.round(1.1 * flat + 300.0, 1)
    height = rng.uniform(0, 60, len(places.ids))
    drive = np.round(dist / rng.uniform(8, 14) + 90.0 + height[:, None] - height[None, :])
    np.fill_diagonal(dist, 0.0)
    np.fill_diagonal(drive, 0.0)
    return drive, dist


def long_rows(
    places: Places, drive: NDArray[np.float64], dist: NDArray[np.float64], seed: int
) -> list[list[str]]:
    """Return the rows of a long table, header first, the pairs shuffled, diagonal included."""
    n = len(places.ids)
    order = np.random.default_rng(seed).permutation(n * n)
    rows = [
        [
            places.ids[k // n],
            places.ids[k % n],
            f"{drive[k // n, k % n]:g}",
            f"{dist[k // n, k % n]:.1f}",
        ]
        for k in order
    ]
    return [HEADER, *rows]


def square_rows(places: Places, figures: NDArray[np.float64]) -> list[list[str]]:
    """Return the rows of a square table, its header first."""
    body = [
        [name, *(f"{figure:.1f}" for figure in row)]
        for name, row in zip(places.ids, figures, strict=True)
    ]
    return [["", *places.ids], *body]


def write_rows(path: Path, rows: list[list[str]], *, delimiter: str = ",") -> Path:
    lines = [delimiter.join(cells) for cells in rows]
    path.write_text("\r\n".join(lines) + "\r\n", encoding="utf-8", newline="")
    return path


@dataclass(frozen=True)
class Seeded:
    """A fault put into a table: the code to be found, and the row and column where."""

    code: str
    row: int | None
    column: str


Seeder = Callable[[list[list[str]], np.random.Generator], Seeded]


def _off_diagonal_row(rows: list[list[str]], rng: np.random.Generator) -> int:
    choices = [k for k, row in enumerate(rows) if k > 0 and row[0] != row[1]]
    return int(rng.choice(choices))


def _set(rows: list[list[str]], k: int, column: int, text: str) -> None:
    rows[k] = [*rows[k][:column], text, *rows[k][column + 1 :]]


def _cell(code: str, texts: list[str]) -> Seeder:
    """Return a seeder that overwrites a figure of an ordinary row."""

    def seed(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
        k = _off_diagonal_row(rows, rng)
        column = int(rng.integers(2, 4))
        _set(rows, k, column, str(rng.choice(texts)))
        return Seeded(code, k + 1, HEADER[column])

    return seed


def _missing_pair(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    del rows[_off_diagonal_row(rows, rng)]
    return Seeded("missing_pair", None, "drive_s")


def _unknown_id(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    column = int(rng.integers(0, 2))
    _set(rows, k, column, f"{rows[k][column]}x")
    return Seeded("unknown_id", k + 1, HEADER[column])


def _missing_id(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    column = int(rng.integers(0, 2))
    _set(rows, k, column, str(rng.choice(["", "  "])))
    return Seeded("missing_id", k + 1, HEADER[column])


def _duplicate_pair(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    later = int(rng.integers(k + 1, len(rows) + 1))
    rows.insert(later, list(rows[k]))
    return Seeded("duplicate_pair", later + 1, "from_id")


def _place_not_in_table(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    gone = rows[_off_diagonal_row(rows, rng)][0]
    rows[:] = [row for row in rows if gone not in row[:2]]
    return Seeded("place_not_in_table", None, "from_id, to_id")


def _diagonal(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = int(rng.choice([k for k, row in enumerate(rows) if row[0] == row[1]]))
    column = int(rng.integers(2, 4))
    _set(rows, k, column, "300")
    return Seeded("diagonal_not_zero", k + 1, HEADER[column])


def _ragged(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    rows[k] = rows[k][:3] if rng.integers(2) else [*rows[k], "9"]
    return Seeded("ragged_row", k + 1, "")


def _missing_column(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    column = int(rng.integers(1, 4))
    rows[:] = [[*row[:column], *row[column + 1 :]] for row in rows]
    return Seeded("missing_column", 1, HEADER[column])


def _unreachable(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    for column in (2, 3):
        _set(rows, k, column, str(rng.choice(["", "inf", "Infinity"])))
    return Seeded("unreachable_pairs", k + 1, "drive_s")


def _cut_off(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    """Close every way into one place."""
    gone = rows[_off_diagonal_row(rows, rng)][1]
    for k, row in enumerate(rows):
        if row[1] == gone and row[0] != gone:
            rows[k] = [row[0], row[1], "", ""]
    main = min((row[0] for row in rows[1:] if row[0] != gone), key=lambda name: int(name[2:]))
    at = next(k for k, row in enumerate(rows) if row[:2] == [gone, main])
    return Seeded("unreachable_place", at + 1, "drive_s")


def _triangle(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    _set(rows, k, 2, "999999")
    return Seeded("triangle_break", k + 1, "drive_s")


def _too_fast(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    k = _off_diagonal_row(rows, rng)
    _set(rows, k, 2, str(rng.choice(["0", "0.5", "1"])))
    return Seeded("implausible_speed", k + 1, "drive_s")


def _too_short(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    longest = max(range(1, len(rows)), key=lambda k: float(rows[k][3]))
    _set(rows, longest, 3, str(int(rng.integers(1, 9))))
    return Seeded("shorter_than_straight_line", longest + 1, "dist_m")


def _all_zero(rows: list[list[str]], rng: np.random.Generator) -> Seeded:
    column = int(rng.integers(2, 4))
    for k in range(1, len(rows)):
        _set(rows, k, column, "0")
    first = next(k for k, row in enumerate(rows) if k > 0 and row[0] != row[1])
    return Seeded("all_zero", first + 1, HEADER[column])


FAULTS: dict[str, Seeder] = {
    "text": _cell("text_in_number", ["12 min", "n/a", "1_000", "12.5x", "-"]),
    "nan": _cell("not_a_number", ["nan", "NaN", "-NAN"]),
    "negative": _cell("negative", ["-1", "-0.5", "-inf"]),
    "absurd": _cell("absurd_figure", ["999999999", "1e300"]),
    "half": _cell("half_given", ["", "inf"]),
    "missing pair": _missing_pair,
    "missing id": _missing_id,
    "duplicate pair": _duplicate_pair,
    "place not in table": _place_not_in_table,
    "diagonal": _diagonal,
    "ragged row": _ragged,
    "missing column": _missing_column,
    "all zero": _all_zero,
}

WARNINGS: dict[str, Seeder] = {
    "unreachable pair": _unreachable,
    "unreachable place": _cut_off,
    "triangle": _triangle,
    "too fast": _too_fast,
    "too short": _too_short,
}

UNKNOWN_ID: Seeder = _unknown_id
