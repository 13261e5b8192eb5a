"""Legs along roads and the points where places meet the road go to the file and back."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import geopandas as gpd
import pytest

from georoute.domain.plan import Plan
from georoute.domain.roads import BackdropKind, BackdropLine, RoadPoint
from georoute.store import read_plan, write_plan
from tests.store_helpers import example_plan

WAY = ((-29.95, -71.34), (-29.951, -71.3412345678), (-29.96, -71.35))
NAMES = (("Calle Larga", 812.5), ("", 20.25), ("Camino «Ñ» 'q\"", 3.0))


@pytest.fixture
def plan() -> Plan:
    plain = example_plan()
    first = plain.tours[0]
    leg = replace(first.legs[0], path=WAY, roads=NAMES, ferry=True)
    tour = replace(first, legs=(leg, *first.legs[1:]))
    point = RoadPoint(
        place_id=leg.to_id,
        lat_deg=-29.96,
        lon_deg=-71.35,
        distance_m=12.5,
        road="Calle Larga",
        stretch=7,
        offset_m=101.25,
        skipped="nearer by 3 m: a way on an island of 2 junctions",
    )
    around = (
        BackdropLine(kind=BackdropKind.MAIN, name="Calle Larga", path=WAY),
        BackdropLine(kind=BackdropKind.COAST, name="", path=WAY[::-1]),
    )
    return replace(plain, tours=(tour, *plain.tours[1:]), road_points=(point,), backdrop=around)


def test_they_come_back_as_they_were(plan: Plan, tmp_path: Path) -> None:
    write_plan(plan, tmp_path / "plan.gpkg")
    assert read_plan(tmp_path / "plan.gpkg") == plan


def test_their_shapes_are_those_of_the_roads(plan: Plan, tmp_path: Path) -> None:
    write_plan(plan, tmp_path / "plan.gpkg")
    legs = gpd.read_file(tmp_path / "plan.gpkg", layer="legs")
    corners = [tuple(spot) for spot in legs.geometry[0].geoms[0].coords]
    assert corners == [(lon, lat) for lat, lon in WAY]
    assert len(legs.geometry[1].geoms[0].coords) == 2
    days = gpd.read_file(tmp_path / "plan.gpkg", layer="days")
    assert next(len(line.coords) for line in days.geometry[0].geoms) == len(WAY)
    points = gpd.read_file(tmp_path / "plan.gpkg", layer="road_points")
    assert (points.geometry[0].x, points.geometry[0].y) == (-71.35, -29.96)


def test_a_file_from_before_there_were_roads_still_opens() -> None:
    golden = Path(__file__).parents[2] / "data" / "plan_schema_1.gpkg"
    plan = read_plan(golden)
    assert plan.road_points == ()
    assert plan.backdrop == ()
    assert all(leg.path == () for tour in plan.tours for leg in tour.legs)
