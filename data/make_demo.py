"""Make the demo: an invented inspection office beside real streets of the open road extract.

Run ``python -m data.make_demo`` from the folder above, after ``make_extract.py``. It writes,
into ``demo/``:

- ``register.csv``: the register of the office, one site a row;
- ``programme.toml``: its working week (the text stands in ``demo_words.py``);
- ``register_dirty.csv``: the register as an old list from elsewhere, with one fault of each kind
  planted on a known row (``PLANTED``), for trying ``check``.

Everything is drawn from one seed, so the same extract gives the same files.
"""

from __future__ import annotations

import csv
import io
import itertools
import math
import random
from dataclasses import dataclass
from datetime import date, timedelta
from pathlib import Path
from string import Template
from typing import TYPE_CHECKING

import osmium

from data.demo_words import BASES, COLUMNS, KINDS, NAME_HEADS, NAME_TAILS, PROGRAMME, Kind

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator

HERE = Path(__file__).parent
EXTRACT = HERE / "la_serena_coquimbo.osm.pbf"
DEMO = HERE / "demo"
SEED = 20270301
FIRST_DATE = date(2027, 3, 1)
METRES_PER_DEGREE = 111_195.0  # of latitude, on a sphere of mean radius; metres suffice here
APART_M = 110.0  # sites lie at least this far apart
BASE_OFFSET_M = 12.0
SHORTEST_STRETCH_M = 15.0  # on a shorter one a site would lie on a corner
TOWN_BORDER_LAT = -29.953  # roughly where Coquimbo ends and La Serena begins
SHARE_OVERDUE, SHARE_DUE_THIS_WEEK = 0.06, 0.24
SHARE_WITH_CONTACT = 0.8

Row = dict[str, str]


@dataclass(frozen=True, slots=True, kw_only=True)
class Stretch:
    """A straight piece of a named street: its ends in degrees and its length in metres."""

    street: str
    highway: str
    start: tuple[float, float]
    end: tuple[float, float]
    length_m: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Spot:
    """A place beside a street."""

    lat_deg: float
    lon_deg: float
    street: str


def metres(one: tuple[float, float], two: tuple[float, float]) -> tuple[float, float]:
    """Return the way east and north from ``one`` to ``two`` (both lon, lat), in metres."""
    shrink = math.cos(math.radians((one[1] + two[1]) / 2))
    return (
        (two[0] - one[0]) * METRES_PER_DEGREE * shrink,
        (two[1] - one[1]) * METRES_PER_DEGREE,
    )


def read_stretches(extract: Path) -> list[Stretch]:
    """Read every piece of a named street, in the order of the file."""
    stretches = []
    for entity in osmium.FileProcessor(str(extract)).with_locations():
        if not isinstance(entity, osmium.osm.Way) or "name" not in entity.tags:
            continue
        points = [(node.lon, node.lat) for node in entity.nodes]
        for start, end in itertools.pairwise(points):
            stretches.append(
                Stretch(
                    street=entity.tags["name"],
                    highway=entity.tags["highway"],
                    start=start,
                    end=end,
                    length_m=math.hypot(*metres(start, end)),
                )
            )
    return stretches


def beside(stretch: Stretch, *, share: float, offset_m: float) -> Spot:
    """Return the spot at ``share`` of a stretch, ``offset_m`` to its left (negative: right)."""
    east, north = metres(stretch.start, stretch.end)
    length = math.hypot(east, north)
    lon = stretch.start[0] + share * (stretch.end[0] - stretch.start[0])
    lat = stretch.start[1] + share * (stretch.end[1] - stretch.start[1])
    shrink = math.cos(math.radians(lat))
    return Spot(
        lat_deg=round(lat + offset_m * east / length / METRES_PER_DEGREE, 6),
        lon_deg=round(lon - offset_m * north / length / METRES_PER_DEGREE / shrink, 6),
        street=stretch.street,
    )


def suits(stretch: Stretch, kind: Kind) -> bool:
    """Tell whether a kind of site may lie on a stretch."""
    west, south, east, north = kind.area
    lon, lat = stretch.start
    inside = west <= lon <= east and south <= lat <= north
    return stretch.highway in kind.highways and stretch.length_m >= SHORTEST_STRETCH_M and inside


def draw_spots(
    kind: Kind, stretches: list[Stretch], taken: list[Spot], rng: random.Random
) -> Iterator[Spot]:
    """Draw the spots of one kind of site: by street length, apart from all others."""
    fitting = [stretch for stretch in stretches if suits(stretch, kind)]
    weights = [stretch.length_m for stretch in fitting]
    drawn = 0
    while drawn < kind.count:
        stretch = rng.choices(fitting, weights)[0]
        side = rng.choice((-1.0, 1.0))
        spot = beside(
            stretch, share=0.15 + 0.7 * rng.random(), offset_m=side * (5.0 + 5.0 * rng.random())
        )
        here = (spot.lon_deg, spot.lat_deg)
        near = (math.hypot(*metres(here, (other.lon_deg, other.lat_deg))) for other in taken)
        if min(near, default=math.inf) < APART_M:
            continue
        taken.append(spot)
        drawn += 1
        yield spot


def address_of(spot: Spot, rng: random.Random) -> str:
    """Return a street with an invented number (a kilometre on country roads), and the town."""
    town = "Coquimbo" if spot.lat_deg < TOWN_BORDER_LAT else "La Serena"
    number = rng.randrange(100, 3900)
    if spot.street.startswith(("Ruta", "Camino")):
        return f"{spot.street} km {number / 1000:.1f}, {town}"
    return f"{spot.street} {number}, {town}"


def due_date(rng: random.Random) -> date:
    """Draw a due date: a few overdue, some in the week, most in the weeks after."""
    draw = rng.random()
    if draw < SHARE_OVERDUE:
        return FIRST_DATE - timedelta(days=rng.randrange(2, 21))
    if draw < SHARE_OVERDUE + SHARE_DUE_THIS_WEEK:
        return FIRST_DATE + timedelta(days=rng.randrange(2, 8))
    return FIRST_DATE + timedelta(days=rng.randrange(8, 46))


def register_row(kind: Kind, number: int, spot: Spot, rng: random.Random) -> Row:
    """Return one row of the register."""
    name = f"{kind.label} {rng.choice(NAME_HEADS)} {rng.choice(NAME_TAILS)}"
    return {
        "site_id": f"{kind.prefix}-{number:03d}",
        "name": name,
        "address": address_of(spot, rng),
        "lat": f"{spot.lat_deg:.6f}",
        "lon": f"{spot.lon_deg:.6f}",
        "task": kind.task,
        "work_min": str(5 * rng.randint(kind.work_min[0] // 5, kind.work_min[1] // 5)),
        "access_min": str(rng.randint(*kind.access_min)),
        "due_date": due_date(rng).isoformat(),
        "contact": f"desk {rng.randint(1, 4)}" if rng.random() < SHARE_WITH_CONTACT else "",
        "notes": rng.choice(kind.notes) if rng.random() < kind.share_with_note else "",
        "asset_material": rng.choice(kind.materials),
        "installed_year": str(rng.randint(1968, 2024)),
    }


def make_register(stretches: list[Stretch]) -> list[Row]:
    """Return the rows of the register, in the order of the kinds of site."""
    rng = random.Random(SEED)  # noqa: S311 - a demo keeps no secret
    taken: list[Spot] = []
    rows: list[Row] = []
    for kind in KINDS:
        for number, spot in enumerate(draw_spots(kind, stretches, taken, rng), start=1):
            row = register_row(kind, number, spot, rng)
            names = {other["name"] for other in rows}
            while row["name"] in names:
                head, tail = rng.choice(NAME_HEADS), rng.choice(NAME_TAILS)
                row["name"] = f"{kind.label} {head} {tail}"
            rows.append(row)
    return rows


@dataclass(frozen=True, slots=True, kw_only=True)
class Planted:
    """A fault planted in the dirty register.

    ``row`` counts as a person does in the file: the header is row 1. ``changes`` replaces
    values; ``copied`` columns are taken from the row before.
    """

    kind: str
    row: int
    column: str
    changes: tuple[tuple[str, str], ...] = ()
    copied: tuple[str, ...] = ()


PLANTED = (
    Planted(kind="missing id", row=3, column="site_id", changes=(("site_id", ""),)),
    Planted(kind="duplicate id", row=6, column="site_id", copied=("site_id", "task")),
    Planted(kind="missing coordinate", row=8, column="lat", changes=(("lat", ""),)),
    Planted(kind="unreadable coordinate", row=10, column="lon", changes=(("lon", "c. 71,25 W"),)),
    Planted(kind="swapped axes", row=12, column="lat", changes=(("lat", "@lon"), ("lon", "@lat"))),
    Planted(kind="zero, zero", row=14, column="lat", changes=(("lat", "0"), ("lon", "0"))),
    Planted(kind="out of range", row=16, column="lat", changes=(("lat", "-129,9112"),)),
    Planted(kind="far outlier", row=18, column="lat", changes=(("lat", "-33,4489"),)),
    Planted(kind="same place twice", row=21, column="lat", copied=("lat", "lon")),
    Planted(kind="negative work time", row=23, column="work_min", changes=(("work_min", "-20"),)),
    Planted(kind="absurd work time", row=25, column="work_min", changes=(("work_min", "2500"),)),
    Planted(kind="text in a number", row=27, column="work_min", changes=(("work_min", "half h"),)),
    Planted(
        kind="unreadable date", row=29, column="due_date", changes=(("due_date", "31/02/2027"),)
    ),
)


def soil(rows: list[Row]) -> list[Row]:
    """Return the rows with decimal commas and every fault of ``PLANTED``."""
    soiled = [dict(row) for row in rows]
    for row in soiled:
        row["lat"], row["lon"] = row["lat"].replace(".", ","), row["lon"].replace(".", ",")
    for fault in PLANTED:
        row, before = soiled[fault.row - 2], soiled[fault.row - 3]
        clean = dict(row)
        for column in fault.copied:
            row[column] = before[column]
        for column, value in fault.changes:
            row[column] = clean[value[1:]] if value.startswith("@") else value
    return soiled


def table_text(rows: Iterable[Row], *, delimiter: str) -> str:
    """Return rows as CSV text with line ends as RFC 4180 asks."""
    text = io.StringIO()
    writer = csv.DictWriter(text, COLUMNS, delimiter=delimiter, lineterminator="\r\n")
    writer.writeheader()
    writer.writerows(rows)
    return text.getvalue()


def programme_text(stretches: list[Stretch]) -> str:
    """Return the programme with its bases beside the streets they should lie at."""
    places = {}
    for name, street, near in BASES:
        stretch = min(
            (stretch for stretch in stretches if stretch.street == street and stretch.length_m > 0),
            key=lambda stretch: math.hypot(*metres(near, stretch.start)),
        )
        spot = beside(stretch, share=0.5, offset_m=BASE_OFFSET_M)
        places[f"{name}_lat"] = f"{spot.lat_deg:.6f}"
        places[f"{name}_lon"] = f"{spot.lon_deg:.6f}"
    return Template(PROGRAMME).substitute(places)


def demo_files(extract: Path) -> dict[str, bytes]:
    """Return the files of the demo by name."""
    stretches = read_stretches(extract)
    rows = make_register(stretches)
    # Every fourth site: short enough to read, spread over the area, of every kind.
    dirty = soil(rows[::4])
    return {
        "register.csv": table_text(rows, delimiter=",").encode(),
        "register_dirty.csv": table_text(dirty, delimiter=";").encode("utf-8-sig"),
        "programme.toml": programme_text(stretches).encode(),
    }


def main() -> None:
    """Write the demo beside this script."""
    DEMO.mkdir(exist_ok=True)
    for name, content in demo_files(EXTRACT).items():
        (DEMO / name).write_bytes(content)
        print(f"demo/{name}: {len(content.splitlines())} lines")


if __name__ == "__main__":
    main()
