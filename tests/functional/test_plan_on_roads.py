"""A register planned along the streets of the shipped extract, judged by the audit."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from georoute import plan
from georoute.audit import audit
from georoute.domain.plan import DayTour, Leg, Plan
from georoute.domain.programme import RoadSettings, TravelMethod
from georoute.domain.run import no_progress
from georoute.domain.sites import Base
from georoute.errors import RoadError
from georoute.pipeline import prepare
from georoute.store import read_plan, write_plan
from tests.spine_helpers import small_programme, small_register

pytestmark = pytest.mark.slow

EXTRACT = Path(__file__).parents[2] / "data" / "la_serena_coquimbo.osm.pbf"
BASE = Base(base_id="base", name="Base", lat_deg=-29.9533, lon_deg=-71.3436)
SPOTS = [
    (-29.9081, -71.2510),
    (-29.9142, -71.2561),
    (-29.9590, -71.3390),
    (-29.9701, -71.3475),
    (-29.9302, -71.2610),
    (-29.9010, -71.2430),
    (-29.9625, -71.3205),
    (-29.9450, -71.2900),
]


def on_roads(path: Path = EXTRACT, **changes: object) -> Plan:
    roads = RoadSettings(path=str(path), country="CL", **changes)  # type: ignore[arg-type]  # by name
    travel = replace(small_programme().travel, method=TravelMethod.ROADS, roads=roads)
    return plan(small_programme(bases=(BASE,), travel=travel), small_register(SPOTS))


@pytest.fixture(scope="module")
def planned() -> Plan:
    return on_roads()


def legs_of(found: Plan) -> list[Leg]:
    return [leg for tour in found.tours for leg in tour.legs]


def with_first_leg(found: Plan, **changes: object) -> Plan:
    tour: DayTour = found.tours[0]
    leg = replace(tour.legs[0], **changes)  # type: ignore[arg-type]  # by name
    return replace(found, tours=(replace(tour, legs=(leg, *tour.legs[1:])), *found.tours[1:]))


def codes(found: Plan) -> set[str]:
    return {finding.code for finding in audit(found) if finding.is_fault}


def test_every_leg_has_its_way_and_the_audit_agrees(planned: Plan) -> None:
    assert audit(planned) == ()
    assert sum(len(tour.stops) for tour in planned.tours) == len(SPOTS)
    assert all(len(leg.path) >= 2 and leg.roads for leg in legs_of(planned))
    assert not planned.travel.estimated
    assert "OpenStreetMap" in planned.travel.credit
    assert {point.place_id for point in planned.road_points} >= {"base", "s0", "s7"}
    assert all(point.distance_m < 500 for point in planned.road_points)
    assert any(line.name for line in planned.backdrop)


def test_the_file_gives_it_back(planned: Plan, tmp_path: Path) -> None:
    write_plan(planned, tmp_path / "plan.gpkg")
    assert read_plan(tmp_path / "plan.gpkg") == planned


def test_planted_faults_are_found(planned: Plan) -> None:
    first = legs_of(planned)[0]
    name, metres = first.roads[0]
    shifted = tuple((lat + 0.0001, lon) for lat, lon in first.path)
    assert "leg_time" in codes(with_first_leg(planned, drive_s=first.drive_s + 0.2))
    assert "leg_length" in codes(with_first_leg(planned, dist_m=first.dist_m + 0.5))
    assert "way_end" in codes(with_first_leg(planned, path=shifted))
    assert "way_length" in codes(with_first_leg(planned, path=(first.path[0], first.path[-1])))
    assert "way_roads" in codes(
        with_first_leg(planned, roads=((name, metres + 1.0), *first.roads[1:]))
    )
    assert "way_kind" in codes(with_first_leg(planned, path=()))
    assert "way_end" in codes(replace(planned, road_points=planned.road_points[1:]))
    assert "travel_note" in codes(replace(planned, travel=replace(planned.travel, estimated=True)))


def test_without_the_kept_network_the_audit_says_what_it_could_not_do(planned: Plan) -> None:
    away = replace(planned, travel=replace(planned.travel, network="gone.roads.npz"))
    findings = audit(away)
    assert [finding.code for finding in findings] == ["roads_not_at_hand"]
    assert not findings[0].is_fault


def test_a_site_far_from_every_road_is_told_and_left_out() -> None:
    roads = RoadSettings(path=str(EXTRACT), country="CL")
    travel = replace(small_programme().travel, method=TravelMethod.ROADS, roads=roads)
    programme = small_programme(bases=(BASE,), travel=travel)
    register = small_register([*SPOTS, (-29.9, -71.5)])  # at sea
    prepared = prepare(programme, register, progress=no_progress)
    far = [f for f in prepared.findings if f.code == "far_from_roads"]
    assert [f.subject for f in far] == ["s8"]
    assert far[0].remedy
    found = plan(programme, register)
    assert [(entry.site_id, entry.code.value) for entry in found.unplaced] == [
        ("s8", "unreachable")
    ]


@pytest.mark.parametrize(
    "content",
    [b"", EXTRACT.read_bytes()[:50_000], b"site_id,lat,lon\n"],
    ids=["empty", "truncated", "another file"],
)
def test_a_bad_source_is_refused_by_name(
    content: bytes, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setenv("GEOROUTE_CACHE", str(tmp_path / "cache"))
    path = tmp_path / "roads.osm.pbf"
    path.write_bytes(content)
    with pytest.raises(RoadError, match=r"roads\.osm\.pbf"):
        on_roads(path)
    assert not list(tmp_path.glob("cache/roads/*"))


def test_an_absent_source_is_told(tmp_path: Path) -> None:
    with pytest.raises(RoadError, match="no such file; name the extract"):
        on_roads(tmp_path / "nowhere.osm.pbf")
