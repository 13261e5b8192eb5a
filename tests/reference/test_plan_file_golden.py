"""Plan files of every schema still open; each golden file was written once and is kept."""

from __future__ import annotations

from datetime import UTC, date, datetime
from pathlib import Path

import pytest

from georoute.audit import audit
from georoute.domain.plan import ReasonCode, StopRule
from georoute.domain.programme import TravelMethod
from georoute.store import read_plan
from georoute.store.schema import SCHEMA

pytestmark = pytest.mark.source("common practice: a file kept from each schema still opens")

DATA = Path(__file__).resolve().parents[1] / "data"


def test_every_schema_has_its_golden_file() -> None:
    kept = {path.name for path in DATA.glob("plan_schema_*.gpkg")}
    assert kept == {f"plan_schema_{number}.gpkg" for number in range(1, SCHEMA + 1)}


def test_schema_1_still_opens() -> None:
    plan = read_plan(DATA / "plan_schema_1.gpkg")
    assert plan.plan_id == "5e0a3e0c-7c5e-5a0f-9d3c-2f1f6c1f9a10"
    assert plan.programme.title == "Lifts of the invented county"
    assert plan.programme.travel.method is TravelMethod.DETOUR
    assert plan.programme.inspectors[0].calendar.holidays == {date(2026, 11, 1): "Toussaint"}
    assert plan.programme.register.columns == {"site_id": "No.", "lat": "Y.Coord"}
    assert [len(tour.stops) for tour in plan.tours] == [4, 4, 2]
    assert plan.tours[1].depart.astimezone(UTC) == datetime(2026, 10, 24, 20, tzinfo=UTC)
    twice = plan.tours[1].stops[1].latest_arrive
    assert twice.isoformat() == "2026-10-25T02:18:51.255000+01:00"
    assert plan.unplaced[0].code is ReasonCode.AFTER_LATEST
    assert plan.unplaced[0].figures == {"days_late": 1.0, "work_s": 2040.0}
    assert plan.exchanges[1].legs_out == (("02", "north"), ("00", "south"))
    assert plan.provenance.stop_rule is StopRule.EFFORT_USED
    assert plan.provenance.issued is not None
    assert plan.provenance.issued.isoformat() == "2026-10-25T02:30:00+01:00"
    assert plan.extra_columns == ("Name", "Baujahr", "note 'q\"")
    assert plan.sites[1].extra["Baujahr"] == "1991"


def test_schema_1_is_still_sound() -> None:
    assert audit(read_plan(DATA / "plan_schema_1.gpkg")) == ()
