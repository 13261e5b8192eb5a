"""A register planned on a small town of straight streets, from its extract to the audit."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from georoute import plan
from georoute.audit import audit
from georoute.cli.roads import roads
from georoute.domain.plan import Plan
from georoute.domain.programme import RoadSettings, TravelMethod
from georoute.domain.sites import Base
from tests.spine_helpers import small_programme, small_register

SIDE, STEP = 5, 0.002
LAT, LON = -29.96, -71.34


def town() -> str:
    """Return an extract: a grid of named streets, one of them one-way."""
    lines = ['<osm version="0.6">']
    for row in range(SIDE):
        for column in range(SIDE):
            spot = f'lat="{LAT + row * STEP:.4f}" lon="{LON + column * STEP:.4f}"'
            lines.append(f'<node id="{1 + row * SIDE + column}" {spot}/>')
    for k in range(SIDE):
        for across in (True, False):
            nodes = [1 + (k * SIDE + j if across else j * SIDE + k) for j in range(SIDE)]
            lines.append(f'<way id="{100 + 2 * k + across}">')
            lines += [f'<nd ref="{node}"/>' for node in nodes]
            name = f"{'Calle' if across else 'Pasaje'} {k + 1}"
            tags = {"highway": "residential", "name": name}
            if across and k == 2:
                tags["oneway"] = "yes"
            lines += [f'<tag k="{key}" v="{value}"/>' for key, value in tags.items()]
            lines.append("</way>")
    return "\n".join([*lines, "</osm>"])


@pytest.fixture
def extract(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    monkeypatch.setenv("GEOROUTE_CACHE", str(tmp_path / "cache"))
    path = tmp_path / "town.osm"
    path.write_text(town(), encoding="utf-8")
    return path


def planned(extract: Path) -> Plan:
    settings = RoadSettings(path=str(extract), country="CL", vehicle_height_m=2.5)
    travel = replace(small_programme().travel, method=TravelMethod.ROADS, roads=settings)
    base = Base(base_id="base", name="Base", lat_deg=LAT + 0.0001, lon_deg=LON + 0.0003)
    spots = [(LAT + 0.0041, LON + 0.001), (LAT + 0.0041, LON + 0.003), (LAT + 0.007, LON + 0.0061)]
    return plan(small_programme(bases=(base,), travel=travel), small_register(spots))


def test_the_plan_is_sound_and_keeps_to_the_streets(extract: Path) -> None:
    found = planned(extract)
    assert audit(found) == ()
    legs = [leg for tour in found.tours for leg in tour.legs]
    named = {name for leg in legs for name, _ in leg.roads}
    assert named <= {f"{kind} {k}" for kind in ("Calle", "Pasaje") for k in range(1, SIDE + 1)}
    # Calle 3 is one-way to the east: nobody drives it to the west.
    for leg in legs:
        for (lat, lon), (next_lat, next_lon) in zip(leg.path, leg.path[1:], strict=False):
            if abs(lat - (LAT + 2 * STEP)) < 1e-9 and abs(next_lat - lat) < 1e-9:
                assert next_lon >= lon - 1e-9
    assert planned(extract) == found  # from the kept network


def test_the_network_is_described(extract: Path, capsys: pytest.CaptureFixture[str]) -> None:
    roads(extract, country="CL")
    told = capsys.readouterr().out
    assert "residential" in told
    assert "0 banned turns" in told
