"""Registers for tests: clean ones at random, files of every format, and faults planted in them.

Nothing here looks at the code under test: it knows the columns and codes by their names only.
"""

from __future__ import annotations

import csv
import io
import json
import math
import random
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from datetime import date, timedelta
from pathlib import Path

import geopandas
import openpyxl
import shapely

Row = dict[str, str]

NUMBERS = ("lat", "lon", "work_min", "access_min", "load", "worth")
DATES = ("earliest_date", "due_date", "latest_date")
OPTIONAL = (
    "name",
    "address",
    "task",
    "work_min",
    "access_min",
    "earliest_date",
    "due_date",
    "latest_date",
    "load",
    "worth",
    "must",
    "contact",
    "notes",
    "Baujahr",
    "Straßen-Nr",
)
WORDS = ("Caleta", "Quay, north", 'Gate "B"', "Ñandú", "Œuvre", "Łódź", "O'Hara", "a;b", "<b>", "")


def seeded(seed: int | str) -> random.Random:
    """Return a stream of random numbers that is the same in every run."""
    return random.Random(seed)  # noqa: S311 - repeatable on purpose


def random_id(rng: random.Random, k: int) -> str:
    """Make an id that stays text: leading zeros, dashes, other scripts."""
    return rng.choice((f"{k:05}", f"S-{k}", f"Ж{k}", f"a/{k} b", f"{k}.0", f"1e{k}", f"={k}"))


def clean_rows(rng: random.Random, count: int) -> list[Row]:
    """Make the rows of a clean register somewhere on Earth, as text in canonical columns."""
    lat0, lon0 = rng.uniform(-65, 70), rng.uniform(-179.5, 179.5)
    spread_km = 10 ** rng.uniform(0, 2)
    width = rng.choice((1, 2))  # one area, or two of equal weight
    columns = ["site_id", "lat", "lon", *(c for c in OPTIONAL if rng.random() < 0.6)]
    rows = []
    for k in range(count):
        # Evenly in a disc, so that no site is far from the rest.
        reach, turn = spread_km * math.sqrt(rng.random()), rng.uniform(0, 2 * math.pi)
        east_km = reach * math.cos(turn) + (spread_km if k % width else 0)
        lat = lat0 + reach * math.sin(turn) / 111.2
        lon = lon0 + east_km / 111.2 / math.cos(math.radians(lat0))
        lon = (lon + 180) % 360 - 180
        full = {**random_values(rng), "site_id": random_id(rng, k)}
        full |= {"lat": f"{lat:.7f}", "lon": f"{lon:.7f}"}
        rows.append({column: full[column] for column in columns})
    return rows


def random_values(rng: random.Random) -> Row:
    """Make the optional cells of one row; about a third of them are empty."""
    earliest = date(2027, 1, 1) + timedelta(days=rng.randrange(300))
    due = earliest + timedelta(days=rng.randrange(30))
    latest = due + timedelta(days=rng.randrange(30))
    values = {
        "work_min": str(rng.choice((1, 15, 45, 90.5, 480))),
        "access_min": str(rng.choice((0, 5, 12.25))),
        "load": str(rng.choice((0, 1, 2.5))),
        "worth": str(rng.choice((0, 100, 9999.99))),
        "must": rng.choice(("yes", "no", "TRUE", "0", "1")),
        "earliest_date": earliest.isoformat(),
        "due_date": due.isoformat(),
        "latest_date": latest.isoformat(),
        "Baujahr": str(rng.randrange(1900, 2027)),
        "Straßen-Nr": rng.choice(("12 a", "007", "3/4")),
    }
    for column in ("name", "address", "task", "contact", "notes"):
        values[column] = rng.choice(WORDS)
    return {column: "" if rng.random() < 0.3 else value for column, value in values.items()}


def csv_bytes(
    rows: Sequence[Row],
    *,
    separator: str = ",",
    decimal_comma: bool = False,
    encoding: str = "utf-8",
    headers: Mapping[str, str] | None = None,
) -> bytes:
    """Write rows as delimited text; ``headers`` renames columns."""
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer, delimiter=separator)
    writer.writerow([(headers or {}).get(column, column) for column in rows[0]])
    for row in rows:
        writer.writerow(
            [
                cell.replace(".", ",") if decimal_comma and column in NUMBERS else cell
                for column, cell in row.items()
            ]
        )
    return buffer.getvalue().encode(encoding)


def write_csv(path: Path, rows: Sequence[Row]) -> Path:
    path.write_bytes(csv_bytes(rows))
    return path


def typed(column: str, cell: str) -> float | date | str | None:
    """Return a cell as a spreadsheet holds it: a number, a date, or text."""
    if cell and column in NUMBERS:
        return float(cell)
    if cell and column in DATES:
        return date.fromisoformat(cell)
    return cell or None


def write_xlsx(path: Path, rows: Sequence[Row], *, sheets: Sequence[str] = ("sites",)) -> Path:
    """Write rows to the first sheet of a workbook; further sheets stay empty."""
    book = openpyxl.Workbook()
    book.remove(book["Sheet"])
    for name in sheets:
        book.create_sheet(name)
    sheet = book[sheets[0]]
    for j, column in enumerate(rows[0], start=1):
        sheet.cell(1, j, column)
    for k, row in enumerate(rows, start=2):
        for j, (column, text) in enumerate(row.items(), start=1):
            cell = sheet.cell(k, j)
            cell.value = typed(column, text)
            if isinstance(cell.value, str):
                cell.data_type = "s"  # an id such as `=7` is text, not a formula
    book.save(path)
    return path


def write_geojson(path: Path, rows: Sequence[Row]) -> Path:
    """Write rows as RFC 7946: longitude first, everything else as properties."""
    features = [
        {
            "type": "Feature",
            "properties": {c: v or None for c, v in row.items() if c not in ("lat", "lon")},
            "geometry": {
                "type": "Point",
                "coordinates": [float(row["lon"]), float(row["lat"])],
            },
        }
        for row in rows
    ]
    collection = {"type": "FeatureCollection", "features": features}
    path.write_text(json.dumps(collection), encoding="utf-8")
    return path


def write_gpkg(path: Path, rows: Sequence[Row], *, crs: str = "EPSG:4326") -> Path:
    """Write rows as a layer of points in any coordinate system."""
    points = [shapely.Point(float(row["lon"]), float(row["lat"])) for row in rows]
    columns = [column for column in rows[0] if column not in ("lat", "lon")]
    data = {column: [row[column] or None for row in rows] for column in columns}
    frame = geopandas.GeoDataFrame(data, geometry=points, crs="EPSG:4326").to_crs(crs)
    frame.to_file(path, layer="sites", driver="GPKG")
    return path


@dataclass(frozen=True, slots=True, kw_only=True)
class Planted:
    """A fault planted in a register: where a person sees it, and its code."""

    row: int
    column: str
    code: str


def plain_rows(rng: random.Random, count: int = 40) -> list[Row]:
    """Make rows with every column a fault may be planted in, and nothing unusual."""
    return [
        {
            "site_id": f"S{k:03}",
            "name": f"Gate {k}",
            "lat": f"{-29.9 + rng.uniform(-0.05, 0.05):.6f}",
            "lon": f"{-71.25 + rng.uniform(-0.05, 0.05):.6f}",
            "work_min": "30",
            "access_min": "5",
            "earliest_date": "2027-03-01",
            "due_date": "2027-03-10",
            "latest_date": "2027-03-20",
            "load": "1",
            "worth": "100",
            "must": "no",
        }
        for k in range(count)
    ]


def swap(row: Row) -> None:
    row["lat"], row["lon"] = row["lon"], row["lat"]


def put(**cells: str) -> Callable[[Row], None]:
    """Return an edit that writes cells into a row."""
    return lambda row: row.update(cells)


BOTH = "lat, lon"

# code, column reported, and the edits that plant it: three at least, each in a row of its own.
ROW_FAULTS: dict[str, tuple[str, str, tuple[Callable[[Row], None], ...]]] = {
    "missing id": ("missing_id", "site_id", (put(site_id=""), put(site_id="  "), put(site_id=" "))),
    "control character": (
        "control_character",
        "site_id",
        (put(site_id="A\tB"), put(site_id="C\nD"), put(site_id="E\x7fF"), put(site_id="G\u2028H")),
    ),
    "blanks in id": (
        "blanks_in_id",
        "site_id",
        (put(site_id=" A1"), put(site_id="A2 "), put(site_id="\u00a0A3")),
    ),
    "missing latitude": ("missing_coordinate", "lat", (put(lat=""), put(lat=" "), put(lat="  "))),
    "missing longitude": ("missing_coordinate", "lon", (put(lon=""), put(lon=" "), put(lon="  "))),
    "unreadable coordinate": (
        "unreadable_coordinate",
        "lat",
        (put(lat="29°54'S"), put(lat="-29.9 S"), put(lat="tbd"), put(lat="-29.9.1")),
    ),
    "comma in a coordinate": (
        "decimal_comma",
        "lon",
        (put(lon="-71,25"), put(lon="-71,2512"), put(lon="-71,")),
    ),
    "not a number": ("not_finite", "lat", (put(lat="NaN"), put(lat="inf"), put(lat="1e999"))),
    "zero": (
        "zero_coordinate",
        BOTH,
        (put(lat="0", lon="0"), put(lat="0.0", lon="-0.0"), put(lat="0e5", lon="00")),
    ),
    "latitude out of range": (
        "coordinate_out_of_range",
        "lat",
        (put(lat="-299.9"), put(lat="-2990000"), put(lat="90.01")),
    ),
    "longitude out of range": (
        "coordinate_out_of_range",
        "lon",
        (put(lon="-712.5"), put(lon="-71251234"), put(lon="180.5")),
    ),
    "swapped axes": ("swapped_axes", BOTH, (swap, swap, swap)),
    "far outlier": (
        "far_outlier",
        BOTH,
        (put(lat="29.9"), put(lon="71.25"), put(lat="-39.9", lon="-17.25")),
    ),
    "negative time": (
        "negative_time",
        "work_min",
        (put(work_min="-1"), put(work_min="-30"), put(work_min="\u22125")),
    ),
    "negative access": (
        "negative_time",
        "access_min",
        (put(access_min="-1"), put(access_min="-0.5"), put(access_min="-1e3")),
    ),
    "absurd time": (
        "absurd_time",
        "work_min",
        (put(work_min="1441"), put(work_min="30000"), put(work_min="1e6")),
    ),
    "tiny time": (
        "tiny_time",
        "work_min",
        (put(work_min="0.5"), put(work_min=".75"), put(work_min="1e-3")),
    ),
    "text in a number": (
        "text_in_number",
        "work_min",
        (put(work_min="45 min"), put(work_min="half an hour"), put(work_min="n/a")),
    ),
    "digits of another script": (
        "text_in_number",
        "load",
        (put(load="١٢"), put(load="1_000"), put(load="0x10")),
    ),
    "comma in a number": (
        "decimal_comma",
        "worth",
        (put(worth="12,5"), put(worth="1,000"), put(worth=",5")),
    ),
    "number not finite": (
        "not_finite",
        "worth",
        (put(worth="nan"), put(worth="-Infinity"), put(worth="1e400")),
    ),
    "negative load": (
        "negative_number",
        "load",
        (put(load="-1"), put(load="-0.1"), put(load="-1e9")),
    ),
    "negative worth": (
        "negative_number",
        "worth",
        (put(worth="-1"), put(worth="-0.1"), put(worth="-1e9")),
    ),
    "unreadable date": (
        "unreadable_date",
        "due_date",
        (
            put(due_date="2027-02-29"),
            put(due_date="soon"),
            put(due_date="2027/03/10"),
            put(due_date="46092"),
            put(due_date="13/03/2027"),
            put(due_date="2027-W10"),
            put(due_date="2027-3-9"),
        ),
    ),
    "ambiguous date": (
        "ambiguous_date",
        "due_date",
        (
            put(due_date="03/04/2027"),
            put(due_date="3.4.2027"),
            put(due_date="12-11-27"),
        ),
    ),
    "absurd date": (
        "absurd_date",
        "latest_date",
        (
            put(latest_date="1899-12-31"),
            put(latest_date="0001-01-01"),
            put(latest_date="9999-12-31"),
        ),
    ),
    "latest before earliest": (
        "latest_before_earliest",
        "latest_date",
        (
            put(latest_date="2027-02-28"),
            put(earliest_date="2027-03-21"),
            put(latest_date="2026-03-20"),
        ),
    ),
    "due outside": (
        "due_outside_dates",
        "due_date",
        (
            put(due_date="2027-02-28"),
            put(due_date="2027-03-21"),
            put(due_date="2037-03-10"),
        ),
    ),
    "yes or no": (
        "unreadable_yes_no",
        "must",
        (put(must="perhaps"), put(must="2"), put(must="x")),
    ),
}


def plant(kind: str, rows: list[Row], rng: random.Random) -> list[Planted]:
    """Plant the faults of one kind in rows of their own; return where they are."""
    code, column, edits = ROW_FAULTS[kind]
    chosen = rng.sample(range(len(rows)), len(edits))
    for k, edit in zip(chosen, edits, strict=True):
        edit(rows[k])
    return [Planted(row=k + 2, column=column, code=code) for k in chosen]
