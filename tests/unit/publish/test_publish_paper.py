"""Plates on paper and the time rule. Clipping is compared with shapely, lengths with pyproj."""

from __future__ import annotations

import random
from dataclasses import replace
from datetime import timedelta
from itertools import pairwise

import numpy as np
import pytest
from pyproj import Geod
from shapely import LineString, box

from georoute.domain.sites import OpenInterval
from georoute.publishing.day_page import view_of
from georoute.publishing.day_view import DayView, lateness_s
from georoute.publishing.page_values import Edition
from georoute.publishing.placing import inside_length
from georoute.publishing.sketch import HEIGHT, PLATE_HEIGHT, WIDTH, sketch_of
from tests.publish_helpers import sample_plan, with_late_stop


def edition_and_view(*, stops: int = 15) -> tuple[Edition, DayView]:
    plan = with_late_stop(sample_plan(stops=stops))
    edition = Edition.of(plan, issued=None, language="en")
    return edition, view_of(edition, plan.tours[0])


def test_clipped_length_is_that_of_shapely() -> None:
    rng = random.Random(7)  # noqa: S311  # a seeded sample, no secret
    # whole numbers, so that level, upright and empty segments occur
    segments = np.array([[float(rng.randint(0, 9)) for _ in range(4)] for _ in range(300)])
    boxes = np.array([[float(rng.randint(0, 7)) for _ in range(2)] + [3.0, 2.0] for _ in range(20)])
    ours = inside_length(boxes, segments)
    for i, (x, y, w, h) in enumerate(boxes):
        frame = box(x, y, x + w, y + h)
        for k, (x1, y1, x2, y2) in enumerate(segments):
            expected = LineString([(x1, y1), (x2, y2)]).intersection(frame).length
            assert ours[i, k] == pytest.approx(expected, abs=1e-9)


@pytest.mark.parametrize("stops", [1, 2, 15, 25])
def test_plates_lie_on_the_paper_and_clear_of_each_other(stops: int) -> None:
    plan = sample_plan(stops=stops)
    edition = Edition.of(plan, issued=None, language="en")
    sketch = sketch_of(view_of(edition, plan.tours[0]), edition.figures.words)
    frames = [box(p.x, p.y, p.x + p.width, p.y + PLATE_HEIGHT) for p in sketch.plates]
    paper = box(0, 0, WIDTH, HEIGHT)
    assert len(frames) == stops + 1
    for k, frame in enumerate(frames):
        assert paper.contains(frame)
        assert all(not frame.intersects(other) for other in frames[:k])


def test_scale_and_north_of_the_sketch_are_true() -> None:
    edition, view = edition_and_view()
    sketch = sketch_of(view, edition.figures.words)
    dots = [plate.leader[:2] for plate in sketch.plates[1:]]
    km, unit = sketch.scale_text.split()
    assert unit == "km"
    metres_per_unit = float(km) * 1000 / sketch.scale_width
    geod = Geod(ellps="WGS84")
    for a, b in ((0, 8), (3, 12), (5, 9)):
        stop_a, stop_b = view.stops[a], view.stops[b]
        _, _, metres = geod.inv(stop_a.lon_deg, stop_a.lat_deg, stop_b.lon_deg, stop_b.lat_deg)
        units = np.hypot(dots[a][0] - dots[b][0], dots[a][1] - dots[b][1])
        assert units * metres_per_unit == pytest.approx(metres, rel=0.01)
        assert (dots[a][1] < dots[b][1]) == (stop_a.lat_deg > stop_b.lat_deg)  # north is up


def test_time_rule_puts_blocks_in_order_inside_the_shift() -> None:
    _, view = edition_and_view()
    rule = view.rule
    assert rule.ticks[0].text == "08:00"
    assert rule.ticks[-1].text == "18:00"
    ends = [(block.x, block.x + block.width) for block in rule.blocks]
    assert all(a[1] <= b[0] + 0.002 for a, b in pairwise(ends))
    assert min(x for x, _ in ends) >= 0
    assert max(end for _, end in ends) <= 100.001
    numbers = [block.text for block in rule.blocks if block.kind in {"work", "late"}]
    assert numbers == [str(k) for k in range(1, 16)]
    # 08:00 to 18:00 is the whole rule, so an hour is 10 %
    first = view.tour.stops[0]
    hours = (first.start - first.start.replace(hour=8, minute=0, second=0)).total_seconds() / 3600
    assert rule.blocks[0].x == pytest.approx(10 * hours, abs=0.01)


def test_brackets_in_one_lane_do_not_touch() -> None:
    _, view = edition_and_view(stops=25)
    assert len(view.rule.brackets) >= 3
    for lane in range(view.rule.lanes):
        row = sorted((b.x, b.end) for b in view.rule.brackets if b.lane == lane)
        assert row
        assert all(a[1] < b[0] for a, b in pairwise(row))


def test_lateness_is_counted_from_the_last_close() -> None:
    plan = sample_plan()
    stop = plan.tours[0].stops[0]
    visit = plan.visits[0]
    hour = timedelta(hours=1)

    def late(*spans: tuple[float, float]) -> float:
        intervals = tuple(
            OpenInterval(opens=stop.start + a * hour, closes=stop.start + b * hour)
            for a, b in spans
        )
        return lateness_s(replace(visit, open_intervals=intervals), stop)

    assert late() == 0
    assert late((-1, 1)) == 0
    assert late((-1, 0)) == 0
    assert late((-3, -2), (-1, -0.5)) == pytest.approx(1800)
    assert late((1, 2)) == 0  # not open yet is early, and the plan would have waited
