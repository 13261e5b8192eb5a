"""The description of a road network, against plain sums over the same extract."""

from __future__ import annotations

import json
import re
from pathlib import Path

import pytest
from typer.testing import CliRunner

from georoute.cli.app import app, exit_code_of
from georoute.errors import RoadError
from georoute.kernels.arrays import UNREACHABLE
from georoute.roads.describe import describe
from georoute.roads.network import build_network
from georoute.roads.sources import read_road_source
from georoute.roads.speeds import default_profile

pytestmark = pytest.mark.slow

HELSINKI = Path(__file__).parents[2] / "data" / "Helsinki.osm.pbf"


def test_the_figures_are_sums_over_the_table() -> None:
    table = read_road_source(HELSINKI, profile=default_profile("FI"))
    found = describe(build_network(table))
    assert found.km == pytest.approx(table.length_mm.sum() / 1e6)
    assert sum(row.km for row in found.classes) == pytest.approx(found.km)
    assert sum(row.stretches for row in found.classes) == table.start.shape[0] == found.stretches
    one_way = (table.forward_ms >= UNREACHABLE) != (table.backward_ms >= UNREACHABLE)
    one_way_km = table.length_mm[one_way].sum() / 1e6
    assert sum(row.one_way_km for row in found.classes) == pytest.approx(one_way_km)
    assert all(3 < row.mean_kmh < 80 for row in found.classes)
    assert 0 < sum(km for _, km in found.cut_off_km) < found.km / 2
    assert found.banned_turns == table.ban_ptr.shape[0] - 1 > 0


def test_the_command_prints_it(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> None:
    monkeypatch.setenv("GEOROUTE_CACHE", str(tmp_path))
    result = CliRunner().invoke(app, ["roads", str(HELSINKI), "--country", "FI"])
    assert result.exit_code == 0
    assert re.search(r"service +1\d\.\d", result.output)
    assert "41 turn restrictions are obeyed" in result.output
    assert "OpenStreetMap contributors" in result.output
    again = CliRunner().invoke(app, ["roads", str(HELSINKI), "--country", "FI", "--json"])
    assert json.loads(again.stdout)["source"] == "Helsinki.osm.pbf"
    assert "kept from an earlier run" in again.stderr


def test_what_is_no_source_of_roads_is_refused(tmp_path: Path) -> None:
    (tmp_path / "roads.txt").write_text("no roads")
    result = CliRunner().invoke(app, ["roads", str(tmp_path / "roads.txt")])
    assert isinstance(result.exception, RoadError)
    assert exit_code_of(result.exception) == 3
