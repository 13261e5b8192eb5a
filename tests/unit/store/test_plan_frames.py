"""Data frames of a plan: the same rows and columns as the file, with types to compute with."""

from __future__ import annotations

import subprocess
import sys
from dataclasses import replace
from datetime import time
from pathlib import Path

import geopandas as gpd
import pandas as pd
import pytest

from georoute.domain.plan import Bound, Plan
from georoute.store import to_geodataframes, write_plan
from georoute.store.cells import codec_for
from georoute.store.lines import split_at_antimeridian
from tests.store_breaches import tour
from tests.store_helpers import example_plan

LAYERS = ("sites", "stops", "legs", "days", "bases", "road_points", "backdrop")


@pytest.fixture(scope="module")
def plan() -> Plan:
    return example_plan()


@pytest.fixture(scope="module")
def frames(plan: Plan) -> dict[str, gpd.GeoDataFrame | pd.DataFrame]:
    return to_geodataframes(plan)


def test_layers_have_shapes_and_tables_have_none(
    frames: dict[str, gpd.GeoDataFrame | pd.DataFrame],
) -> None:
    assert list(frames)[: len(LAYERS)] == list(LAYERS)
    for name, frame in frames.items():
        assert isinstance(frame, gpd.GeoDataFrame) == (name in LAYERS)
        if name in LAYERS:
            assert frame.crs == "EPSG:4326"
            assert frame.geometry.notna().all()


def test_figures_add_up(frames: dict[str, gpd.GeoDataFrame | pd.DataFrame], plan: Plan) -> None:
    by_tour = frames["legs"].groupby("tour_id")["dist_m"].sum()
    days = frames["days"].set_index("tour_id")
    assert (by_tour - days["dist_m"]).abs().max() < 0.001
    assert days["cost"].sum() == pytest.approx(plan.cost)
    assert list(days["stops"]) == [4, 4, 2]


def test_times_are_instants_of_the_zone(
    frames: dict[str, gpd.GeoDataFrame | pd.DataFrame], plan: Plan
) -> None:
    stops = frames["stops"]
    assert str(stops["arrive"].dt.tz) == plan.programme.zone
    waits = (stops["start"] - stops["arrive"]).dt.total_seconds()
    assert waits.sum() == pytest.approx(sum(t.wait_s for t in plan.tours))
    night = frames["days"].iloc[1]
    assert (night["finish"] - night["depart"]).total_seconds() == night["duration_s"]


def test_columns_have_units_and_status_words(
    frames: dict[str, gpd.GeoDataFrame | pd.DataFrame],
) -> None:
    assert {"drive_s", "dist_m", "leg_order"} <= set(frames["legs"].columns)
    assert {"work_min", "access_min", "wait_min", "stop_order"} <= set(frames["stops"].columns)
    assert set(frames["stops"]["status"]) == {"planned"}
    assert sorted(frames["visits"]["status"].value_counts().items()) == [
        ("planned", 10),
        ("unplaced", 1),
    ]
    assert dict(frames["sites"].set_index("site_id")["status"])["09"] == "unplaced"


def test_columns_of_the_register_come_last_in_order(
    frames: dict[str, gpd.GeoDataFrame | pd.DataFrame],
) -> None:
    columns = list(frames["sites"].columns)
    assert columns[-4:] == ["Name_2", "Baujahr", "note 'q\"", "geometry"]
    assert frames["sites"]["Baujahr"].isna().sum() == 4
    names = frames["extra_columns"].set_index("header")["site_column"]
    assert names["Name"] == "Name_2"


def test_empty_columns_keep_their_type(plan: Plan) -> None:
    bare = to_geodataframes(plan)["days"]
    assert bare["bound_value"].dtype == "float64"
    assert bare["bound_exact"].dtype == "boolean"
    proven = tour(plan, 0, bound=Bound(value=3.5, method="exact", exact=True))
    days = to_geodataframes(proven)["days"]
    assert days["bound_value"].iloc[0] == 3.5
    assert days["bound_value"].isna().sum() == 2
    assert bool(days["bound_exact"].iloc[0]) is True


def test_missing_register_rows_are_missing(plan: Plan) -> None:
    sites = (replace(plan.sites[0], row=None), *plan.sites[1:])
    rows = to_geodataframes(replace(plan, sites=sites))["sites"]["register_row"]
    assert rows.isna().sum() == 1
    assert rows.iloc[1] == 3


def test_frames_can_be_saved_by_geopandas(
    frames: dict[str, gpd.GeoDataFrame | pd.DataFrame], tmp_path: Path
) -> None:
    for name in LAYERS:
        layer = frames[name]
        assert isinstance(layer, gpd.GeoDataFrame)
        layer.to_file(tmp_path / f"{name}.geojson")
    assert len(gpd.read_file(tmp_path / "stops.geojson")) == 10


def test_plan_without_tours_has_empty_frames(plan: Plan) -> None:
    frames = to_geodataframes(replace(plan, tours=(), exchanges=(), unplaced=()))
    assert len(frames["stops"]) == len(frames["legs"]) == len(frames["days"]) == 0
    assert "arrive" in frames["stops"].columns


def test_place_of_unknown_id_has_no_shape(plan: Plan, tmp_path: Path) -> None:
    lost = replace(plan, sites=plan.sites[1:])
    assert to_geodataframes(lost)["stops"].geometry.isna().sum() == 1
    write_plan(lost, tmp_path / "lost.gpkg")
    assert gpd.read_file(tmp_path / "lost.gpkg", layer="stops").geometry.isna().sum() == 1


def test_reading_a_plan_needs_no_data_frames() -> None:
    code = "import sys; from georoute.store import read_plan, write_plan; print(*sys.modules)"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert not {"geopandas", "pandas", "shapely", "numba"} & set(done.stdout.split())


def test_unknown_name_of_the_store_is_an_error() -> None:
    store = sys.modules["georoute.store"]
    with pytest.raises(AttributeError, match="nothing"):
        _ = store.nothing


@pytest.mark.parametrize(
    ("line", "parts"),
    [
        (((1.0, 2.0), (3.0, 4.0)), (((1.0, 2.0), (3.0, 4.0)),)),
        (
            ((170.0, 0.0), (-170.0, 10.0)),
            (((170.0, 0.0), (180.0, 5.0)), ((-180.0, 5.0), (-170.0, 10.0))),
        ),
        (
            ((-170.0, 10.0), (170.0, 0.0)),
            (((-170.0, 10.0), (-180.0, 5.0)), ((180.0, 5.0), (170.0, 0.0))),
        ),
        (
            ((180.0, 1.0), (-180.0, 1.0)),
            (((180.0, 1.0), (180.0, 1.0)), ((-180.0, 1.0), (-180.0, 1.0))),
        ),
    ],
)
def test_lines_are_cut_at_the_antimeridian(
    line: tuple[tuple[float, float], ...], parts: tuple[object, ...]
) -> None:
    assert split_at_antimeridian(line) == parts


def test_type_that_no_cell_can_hold_is_refused() -> None:
    with pytest.raises(TypeError, match="no way to write"):
        codec_for(complex)
    assert codec_for(time | None).optional
