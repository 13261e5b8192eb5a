"""Lines of roads on pages: moved aside, encoded, cut to a view, held to a budget.

Outside check: distances, lengths and parallels by shapely (GEOS), places by pyproj.
"""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

import numpy as np
import pytest
import shapely
from pyproj import Geod

from georoute.domain.roads import BackdropKind
from georoute.publishing.ground import DETAILS, MAIN_ONLY, Ground, box_around, fitting
from georoute.publishing.island import island_json
from georoute.publishing.leg_paths import pieces_of, told_pieces, tour_m
from georoute.publishing.page_budget import MOST_BYTES, ground_bytes
from georoute.publishing.road_lines import STEP_DEG, Flat, moved_aside, steps_of, thinned
from georoute.publishing.shore import water_in
from georoute.publishing.strands import runs_of
from tests.roads_pages_helpers import LAKE, SHORE, roads_plan, streets, with_bay

GEOD = Geod(ellps="WGS84")
STEP_M = 1.2
"""Half a step of 1e-5 degrees either way is less than this."""


@pytest.fixture(scope="module")
def ground() -> Ground:
    return Ground.of(with_bay(roads_plan()))


@pytest.fixture(scope="module")
def tour() -> list[np.ndarray]:
    plan = roads_plan()
    return [tour_m(plan.tours[0], Ground.of(plan).flat)]


def decoded(told: object) -> list[list[tuple[float, float]]]:
    """Read lines back as a page does: running sums, cut by sizes."""
    assert isinstance(told, dict)
    steps = np.cumsum(np.array(told["flat"]).reshape(-1, 2), axis=0) * STEP_DEG
    ends = np.cumsum([0, *told["sizes"]])
    return [[tuple(p) for p in steps[a:b]] for a, b in pairwise(ends)]


def random_walk(seed: int) -> np.ndarray:
    """Return a line with turns of every sharpness, hairpins among them."""
    rng = np.random.default_rng(seed)
    turns = np.cumsum(rng.choice([0.1, 0.6, 1.6, 2.6, math.pi], 40) * rng.choice([-1, 1], 40))
    step = rng.choice([0.4, 2.0, 9.0, 40.0], 40)
    return np.cumsum(np.column_stack([np.cos(turns), np.sin(turns)]) * step[:, None], axis=0)


@pytest.mark.parametrize("seed", range(40))
@pytest.mark.parametrize("by", [3.0, -3.0])
def test_a_line_moved_aside_has_no_spikes(seed: int, by: float) -> None:
    line = random_walk(seed)
    moved = moved_aside(line, by)
    off = shapely.distance(shapely.LineString(line), shapely.points(moved))
    assert off.max() <= abs(by) * math.sqrt(2) + 1e-9
    ends = np.hypot(*(moved[[0, -1]] - line[[0, -1]]).T)
    assert ends == pytest.approx([abs(by)] * 2)


def test_a_gentle_line_is_moved_as_geos_moves_it() -> None:
    x = np.linspace(0, 400, 60)
    line = np.column_stack([x, 30 * np.sin(x / 40)])
    for by in (4.0, -4.0):
        twin = shapely.offset_curve(shapely.LineString(line), by, join_style="mitre")
        moved = shapely.LineString(moved_aside(line, by))
        assert shapely.hausdorff_distance(moved, twin) < 0.05


def test_out_and_back_on_one_road_lie_on_its_two_sides() -> None:
    line = np.array([[0.0, 0.0], [50.0, 0.0], [100.0, 20.0]])
    out, back = moved_aside(line, 3.0), moved_aside(line[::-1], 3.0)
    assert shapely.LineString(out).distance(shapely.LineString(back)) == pytest.approx(6.0)


def test_thinning_keeps_ends_and_stays_near() -> None:
    line = random_walk(3)
    kept = thinned(line, 2.0)
    assert (kept[[0, -1]] == line[[0, -1]]).all()
    assert shapely.distance(shapely.LineString(kept), shapely.points(line)).max() <= 2.0
    out_and_back = np.array([[0.0, 0.0], [40.0, 1.0], [0.0, 0.0]])
    assert len(thinned(out_and_back, 1.0)) == 3


def test_steps_on_the_spot_are_left_out_but_a_line_keeps_two_points() -> None:
    assert steps_of([(5, 5), (5, 5), (6, 7)]) == [5, 5, 1, 2]
    assert steps_of([(5, 5), (5, 5)]) == [5, 5, 0, 0]


@pytest.mark.parametrize("lon0", [-71.25, 179.99])
def test_flat_metres_are_metres_and_come_back(lon0: float) -> None:
    flat = Flat(-29.9, lon0)
    places = [(-29.9, lon0), (-29.85, lon0 + 0.04 - (360 if lon0 > 100 else 0))]
    points = flat.forward(places)
    length = GEOD.line_length([lon for _, lon in places], [lat for lat, _ in places])
    assert np.hypot(*(points[1] - points[0])) == pytest.approx(length, rel=4e-3)
    lat, lon = flat.back(points)
    assert lat == pytest.approx([p[0] for p in places])
    assert lon[1] == pytest.approx(lon0 + 0.04)


def test_paths_of_legs_come_back_from_their_differences() -> None:
    plan = with_bay(roads_plan())
    ground = Ground.of(plan)
    for leg in plan.tours[0].legs:
        told = told_pieces(pieces_of(leg, ground), ground.flat)
        back = [np.cumsum(np.array(p[1:]).reshape(-1, 2), axis=0) * STEP_DEG for p in told]
        line = ground.flat.forward([(a, b) for a, b in np.vstack(back)])
        there = shapely.LineString(ground.flat.forward(leg.path))
        assert shapely.LineString(line).hausdorff_distance(there) < 2.5 + STEP_M
        assert [piece[0] for piece in told] == ([0, 1, 0] if leg.ferry else [0])


def test_a_ferry_that_the_map_does_not_hold_is_the_longest_step() -> None:
    plan = with_bay(roads_plan())
    leg = plan.tours[0].legs[0]
    bare = Ground.of(roads_plan())
    pieces = pieces_of(leg, bare)
    assert [piece.ferry for piece in pieces] == [False, True, False]
    steps = np.hypot(*np.diff(bare.flat.forward(leg.path), axis=0).T)
    assert np.hypot(*np.diff(pieces[1].points, axis=0).T).max() == steps.max()


def test_ground_is_cut_to_view_and_tour(ground: Ground, tour: list[np.ndarray]) -> None:
    box = box_around(tour[0])
    told = ground.view(box, tour, DETAILS[0])
    line = shapely.LineString(tour[0])
    frame = shapely.box(*box).buffer(STEP_M)
    for kind, reach in (("minor", 800), ("local", 800)):
        lines = [shapely.LineString(ground.flat.forward(p)) for p in decoded(told[kind])]
        assert len(lines) > 100
        far = max(shapely.distance(line, shapely.points(p.coords)).max() for p in lines)
        assert 0.8 * reach < far <= reach * 1.06 + STEP_M
    mains = [shapely.LineString(ground.flat.forward(p)) for p in decoded(told["main"])]
    assert all(frame.contains(part) for part in mains)
    raw = [ground.flat.forward(s.path) for s in streets().lines if s.kind is BackdropKind.MAIN]
    length = sum(shapely.LineString(r).intersection(frame).length for r in raw)
    assert sum(part.length for part in mains) == pytest.approx(length, rel=0.01)


def test_local_roads_go_first_when_bytes_are_few(ground: Ground, tour: list[np.ndarray]) -> None:
    box = box_around(tour[0])
    kinds = []
    for budget in (10**6, 28_000, 14_000, 4_000, 1):
        told = fitting(ground, box, tour, budget)
        assert len(island_json(told)) <= max(budget, 20)
        kinds.append({kind for kind in ("main", "minor", "local") if kind in told})
    assert kinds[0] == {"main", "minor", "local"}
    assert kinds[-1] == set()
    assert all(after <= before for before, after in pairwise(kinds))
    assert {"main"} in kinds
    assert "local" not in ground.view(box, tour, MAIN_ONLY[0])


@pytest.mark.parametrize("page", [0, 200_000, 329_000, 390_000, 399_000, 900_000])
def test_no_page_passes_the_limit(page: int) -> None:
    assert page + ground_bytes(page) <= max(MOST_BYTES, page)


def test_the_sea_lies_right_of_the_shore(ground: Ground) -> None:
    box = box_around(ground.flat.forward([(-29.85, -71.40), (-30.0, -71.20)]))
    water = ground.water(box)
    wet, dry = ground.flat.forward([(-29.90, -71.35), (-29.905, -71.25)])
    assert water.contains(shapely.Point(wet))
    assert not water.contains(shapely.Point(dry))
    assert water.contains(shapely.Point(ground.flat.forward(LAKE).mean(axis=0)))
    assert water.is_valid


def test_a_shore_that_breaks_off_colours_nothing() -> None:
    flat = Flat(-29.9, -71.3)
    shore = flat.forward(SHORE)
    box = box_around(shore)
    broken = [shapely.LineString(shore[:5]), shapely.LineString(shore[7:])]
    assert water_in(box, broken, []).is_empty
    whole = water_in(box, [shapely.LineString(shore)], [])
    assert whole.is_empty  # the box is wider than the shore is long
    narrow = np.array([shore[:, 0].min(), shore[3, 1], shore[:, 0].max(), shore[1, 1]])
    assert water_in(narrow, [shapely.LineString(shore)], []).area > 0


def test_an_island_is_land() -> None:
    ring = shapely.Point(0, 0).buffer(300).exterior  # GEOS: clockwise, so the land lies right
    land_left = shapely.LineString(list(ring.coords)[::-1])
    box = np.array([-1000.0, -1000.0, 1000.0, 1000.0])
    sea = water_in(box, [land_left], [])
    assert sea.area == pytest.approx(4e6 - math.pi * 300**2, rel=0.01)
    assert not sea.contains(shapely.Point(0, 0))


def test_tours_that_share_a_road_lie_side_by_side() -> None:
    plan = roads_plan(stops=4)
    tour = plan.tours[0]
    flat = Ground.of(plan).flat
    first, second = runs_of([tour, tour], flat)
    slots = [[{slot for slot, _ in leg} for leg in legs] for legs in (first, second)]
    assert all(leg == {0} for leg in slots[0])
    assert all(0 not in leg for leg in slots[1])
    # the way back has its own side of the road
    back = replace(tour, legs=tuple(replace(leg, path=leg.path[::-1]) for leg in tour.legs))
    _, turned = runs_of([tour, back], flat)
    shared = {slot for legs in turned for slot, _ in legs}
    assert shared <= {0, 1}
    whole = [np.vstack([p for _, p in leg]) for leg in first]
    for line, leg in zip(whole, tour.legs, strict=True):
        assert line[0] == pytest.approx(flat.forward(leg.path)[0])
        assert line[-1] == pytest.approx(flat.forward(leg.path)[-1])
