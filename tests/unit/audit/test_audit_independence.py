"""The audit shares no code with what it checks, and measures like an outside reference."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace

from georoute.audit.remeasure import Ruler
from georoute.audit.report import Report
from georoute.domain.programme import TravelMethod
from georoute.domain.sites import Site
from tests.store_breaches import programme
from tests.store_helpers import example_plan

STRANGERS = (
    "georoute.kernels",
    "georoute.problem",
    "georoute.timetable",
    "georoute.measure",
    "georoute.sequence",
    "georoute.split",
    "georoute.improve",
    "numba",
    "geopandas",
)


def test_audit_loads_nothing_of_what_makes_plans() -> None:
    code = "import sys, georoute.audit; print('\\n'.join(sys.modules))"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    loaded = set(done.stdout.split())
    assert "georoute.audit" in loaded
    assert not loaded.intersection(STRANGERS)


def _leg(method: TravelMethod, a: tuple[float, float], b: tuple[float, float]) -> float:
    plan = example_plan(method)
    travel = replace(plan.programme.travel, circuity=1.0)
    sites = tuple(
        Site(site_id=name, lat_deg=lat, lon_deg=lon) for name, (lat, lon) in (("a", a), ("b", b))
    )
    plan = programme(replace(plan, sites=sites), travel=travel)
    figures = Ruler(plan, Report()).leg("a", "b")
    assert figures is not None
    return figures[1]


def test_geodesic_is_that_of_karney() -> None:
    # The example of GeodSolve's manual (GeographicLib): `echo 40.6 -73.8 51.6 -0.5 | GeodSolve -i`
    # answers 51.19888283 107.82177673 5551759.400.
    assert abs(_leg(TravelMethod.GEODESIC, (40.6, -73.8), (51.6, -0.5)) - 5_551_759.400) < 0.001


def test_great_circle_is_on_the_mean_sphere() -> None:
    # A quarter of a great circle is pi / 2 times the radius.
    quarter = _leg(TravelMethod.GREAT_CIRCLE, (0.0, 10.0), (90.0, 0.0))
    assert abs(quarter - 6_371_008.7714 * 3.141592653589793 / 2) < 1e-6
