"""The plan file: round trip, refusals, migrations."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from contextlib import closing
from dataclasses import dataclass, replace
from datetime import UTC, datetime
from pathlib import Path
from types import MappingProxyType

import pytest

from georoute.domain.plan import Bound, Plan
from georoute.errors import OutputError, PlanFileError
from georoute.store import geopackage, read_plan, write_plan
from georoute.store.geopackage import Tables, read_tables
from georoute.store.migrations import MIGRATIONS, migrated, schema_of
from georoute.store.schema import SCHEMA
from georoute.store.settings import read_settings
from georoute.store.sheets import sheets_of as geopackage_sheets_of
from tests.store_breaches import programme, tour
from tests.store_helpers import SATURDAY, example_plan, local


@dataclass(frozen=True)
class Shape:
    turn: complex


@pytest.fixture(scope="module")
def plan() -> Plan:
    return example_plan()


@pytest.fixture
def path(plan: Plan, tmp_path: Path) -> Path:
    write_plan(plan, tmp_path / "week.gpkg")
    return tmp_path / "week.gpkg"


def edit(path: Path, statement: str) -> None:
    with closing(sqlite3.connect(path)) as connection, connection:
        connection.execute(statement)


def test_plan_comes_back_as_it_was(plan: Plan, path: Path) -> None:
    assert read_plan(path) == plan


def test_hour_that_comes_twice_keeps_its_side(plan: Plan, path: Path) -> None:
    late = [t.latest_arrive for t in read_plan(path).tours[1].stops][:2]
    # Sunday 25 October 2026: 02:20 in summer time, then 02:18 in winter time, almost an hour on.
    assert [moment.isoformat()[11:16] + moment.isoformat()[-6:] for moment in late] == [
        "02:20+02:00",
        "02:18+01:00",
    ]
    assert [m.fold for m in late] == [t.latest_arrive.fold for t in plan.tours[1].stops][:2]


def test_proven_bound_comes_back(plan: Plan, tmp_path: Path) -> None:
    proven = tour(plan, 0, bound=Bound(value=20.25, method="exact", exact=True))
    write_plan(proven, tmp_path / "a.gpkg")
    assert read_plan(tmp_path / "a.gpkg").tours[0].bound == proven.tours[0].bound
    assert read_plan(tmp_path / "a.gpkg").tours[1].bound is None


@pytest.mark.parametrize(
    "issued",
    [
        None,
        datetime(2026, 10, 25, 0, 30, tzinfo=UTC),
        local(SATURDAY, 18),
        datetime.fromisoformat("2026-10-25T02:30:00-03:30"),
    ],
)
def test_issue_time_of_any_zone_comes_back(
    issued: datetime | None, plan: Plan, tmp_path: Path
) -> None:
    stamped = replace(plan, provenance=replace(plan.provenance, issued=issued))
    write_plan(stamped, tmp_path / "a.gpkg")
    assert read_plan(tmp_path / "a.gpkg").provenance.issued == issued


def test_equal_plans_give_equal_bytes(plan: Plan, path: Path, tmp_path: Path) -> None:
    write_plan(example_plan(), tmp_path / "again.gpkg")
    assert (tmp_path / "again.gpkg").read_bytes() == path.read_bytes()
    write_plan(replace(plan, plan_id="other"), tmp_path / "again.gpkg")
    assert (tmp_path / "again.gpkg").read_bytes() != path.read_bytes()


def test_extra_columns_keep_header_order_and_absence(plan: Plan, path: Path) -> None:
    found = read_plan(path)
    assert found.extra_columns == ("Name", "Baujahr", "note 'q\"")
    assert "Baujahr" not in found.sites[0].extra
    assert dict(found.sites[1].extra) == {"Name": "lift 1", "Baujahr": "1991", "note 'q\"": "=1+1"}
    assert dict(found.sites[1].extra) == dict(plan.sites[1].extra)


def test_column_that_a_later_version_adds_reads_as_its_default(plan: Plan, path: Path) -> None:
    edit(path, "ALTER TABLE visits DROP COLUMN worth")
    found = read_plan(path)
    assert {visit.worth for visit in found.visits} == {None}
    assert replace(found, visits=plan.visits) == plan


@pytest.mark.parametrize(
    ("statement", "words"),
    [
        ("DELETE FROM plan WHERE key = 'programme.tariff.km'", "programme.tariff.km"),
        ("UPDATE plan SET value = 'Mars/Olympus' WHERE key = 'programme.zone'", "Mars/Olympus"),
        ("UPDATE plan SET value = 'dear' WHERE key = 'programme.tariff.km'", "dear"),
        ("UPDATE stops SET arrive = 'noon'", "noon"),
        ("UPDATE stops SET arrive = '2026-10-24T08:00:00'", "no offset"),
        ("UPDATE stops SET arrive = NULL", "empty"),
        ("UPDATE legs SET drive_s = 'long'", "long"),
        ("UPDATE unplaced SET reason = 'bored'", "bored"),
        ("UPDATE unplaced SET figures = '[1, '", "JSON"),
        ("UPDATE visits SET must = 7", "neither 0 nor 1"),
        ("UPDATE exchanges SET legs_out = '[[1, 2]]'", "TypeError"),
        ("ALTER TABLE legs DROP COLUMN dist_m", "dist_m"),
        ("DROP TABLE stages", "stages"),
    ],
)
def test_damage_is_told_with_a_remedy(statement: str, words: str, path: Path) -> None:
    edit(path, statement)
    with pytest.raises(PlanFileError, match=words) as caught:
        read_plan(path)
    assert "is damaged" in str(caught.value)
    assert "restore a copy or run `plan` again" in str(caught.value)


@pytest.mark.parametrize("kept", [0, 50, 4_096, 30_000])
def test_cut_off_file_is_told(kept: int, path: Path) -> None:
    path.write_bytes(path.read_bytes()[:kept])
    with pytest.raises(PlanFileError, match=r"damaged|not a plan file"):
        read_plan(path)


def test_any_page_of_noise_is_told_or_harmless(plan: Plan, path: Path) -> None:
    whole = path.read_bytes()
    refused = 0
    for start in range(0, len(whole), 4_096):
        path.write_bytes(whole[:start] + b"\xa5" * 4_096 + whole[start + 4_096 :])
        try:
            assert read_plan(path) == plan
        except PlanFileError:
            refused += 1
    assert refused > 10


def test_missing_file_is_told(tmp_path: Path) -> None:
    with pytest.raises(PlanFileError, match="there is no such plan file"):
        read_plan(tmp_path / "absent.gpkg")


def test_other_files_are_told(tmp_path: Path) -> None:
    text = tmp_path / "register.csv"
    text.write_text("site_id,lat,lon\n" * 100, "utf-8")
    with pytest.raises(PlanFileError, match="no plan file"):
        read_plan(text)
    empty = tmp_path / "other.sqlite"
    edit(empty, "CREATE TABLE t (x)")
    with pytest.raises(PlanFileError, match="no GeoPackage"):
        read_plan(empty)
    other = tmp_path / "other.gpkg"
    geopackage.write_sheets(other, ())
    with pytest.raises(PlanFileError, match="a GeoPackage but not a plan file"):
        read_plan(other)


def test_newer_schema_is_refused(path: Path) -> None:
    edit(path, "UPDATE plan SET value = value + 1 WHERE key = 'schema'")
    with pytest.raises(PlanFileError, match="install a newer version of georoute"):
        read_plan(path)


def test_older_schema_without_a_step_is_refused(path: Path) -> None:
    edit(path, "UPDATE plan SET value = '0' WHERE key = 'schema'")
    with pytest.raises(PlanFileError, match="open it with the version that made it"):
        read_plan(path)


def test_steps_lead_from_schema_to_schema(path: Path) -> None:
    def rename(tables: Tables) -> Tables:
        rows = [{**row, "worth_eur": row["worth"]} for row in tables["visits"]]
        return {**tables, "visits": rows}

    def mark(tables: Tables) -> Tables:
        rows: list[dict[str, object]] = [*tables["plan"], {"key": "marked", "value": "yes"}]
        return {**tables, "plan": rows}

    tables = dict(read_tables(path))
    assert schema_of(tables, path=path) == 1
    found = migrated(tables, path=path, steps={1: rename, 2: mark}, wanted=3)
    assert found["visits"][4]["worth_eur"] == 75.0
    assert found["plan"][-1]["key"] == "marked"
    assert migrated(tables, path=path, wanted=1) == tables


def test_every_older_schema_has_a_step() -> None:
    assert sorted(MIGRATIONS) == list(range(1, SCHEMA))


def _unknown_number(plan: Plan) -> Plan:
    return tour(plan, 0, cost=float("nan"))


def _naive_time(plan: Plan) -> Plan:
    return tour(plan, 0, depart=plan.tours[0].depart.replace(tzinfo=None))


def _half_character(plan: Plan) -> Plan:
    return programme(plan, title="\ud800")


@pytest.mark.parametrize("spoil", [_unknown_number, _naive_time, _half_character])
def test_what_would_not_come_back_is_not_written(
    spoil: Callable[[Plan], Plan], plan: Plan, path: Path
) -> None:
    with pytest.raises(OutputError):
        write_plan(spoil(plan), path)
    assert read_plan(path) == plan
    assert [p.name for p in path.parent.iterdir()] == [path.name]


@pytest.mark.parametrize("suffix", ["-wal", "-journal"])
def test_file_open_in_another_program_is_not_replaced(suffix: str, plan: Plan, path: Path) -> None:
    path.with_name(path.name + suffix).write_bytes(b"log of the other program")
    with pytest.raises(OutputError, match="is open in another program"):
        write_plan(replace(plan, plan_id="other"), path)


def test_file_that_a_gis_switched_to_a_write_ahead_log_opens(plan: Plan, path: Path) -> None:
    edit(path, "PRAGMA journal_mode = WAL")
    assert read_plan(path) == plan
    assert [p.name for p in path.parent.iterdir()] == [path.name]
    write_plan(plan, path)


def test_changes_still_in_the_log_of_a_gis_are_read(path: Path) -> None:
    with closing(sqlite3.connect(path)) as gis:
        gis.execute("PRAGMA journal_mode = WAL")
        gis.execute("UPDATE sites SET notes = 'ring twice'")
        gis.commit()
        assert path.with_name(path.name + "-wal").stat().st_size > 0
        assert {site.notes for site in read_plan(path).sites} == {"ring twice"}


def test_setting_of_unknown_type_is_refused() -> None:
    with pytest.raises(TypeError, match="no way to write"):
        read_settings(Shape, {"shape.turn": "1j"}, prefix="shape")


def test_reading_leaves_the_folder_as_it_was(path: Path) -> None:
    before = path.read_bytes()
    read_plan(path)
    assert [p.name for p in path.parent.iterdir()] == [path.name]
    assert path.read_bytes() == before


def test_interrupt_while_writing_leaves_the_old_file(
    plan: Plan, path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = path.read_bytes()

    def interrupted(temporary: Path, _sheets: object) -> None:
        temporary.write_bytes(b"half a plan")
        raise KeyboardInterrupt

    monkeypatch.setattr("georoute.store.plan_file.write_sheets", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_plan(replace(plan, plan_id="other"), path)
    assert path.read_bytes() == before
    assert [p.name for p in path.parent.iterdir()] == [path.name]


def test_file_that_reads_back_differently_is_refused(
    plan: Plan, path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    before = path.read_bytes()
    monkeypatch.setattr(
        "georoute.store.plan_file.sheets_of",
        lambda _plan: geopackage_sheets_of(replace(plan, unplaced=())),
    )
    with pytest.raises(OutputError, match="does not come back"):
        write_plan(plan, path)
    assert path.read_bytes() == before


def test_plan_without_tours_comes_back(plan: Plan, tmp_path: Path) -> None:
    bare = replace(
        plan,
        sites=(),
        visits=(),
        tours=(),
        unplaced=(),
        stages=(),
        exchanges=(),
        extra_columns=(),
        programme=replace(
            plan.programme,
            bases=(),
            inspectors=(),
            register=replace(plan.programme.register, columns=MappingProxyType({})),
        ),
    )
    write_plan(bare, tmp_path / "bare.gpkg")
    assert read_plan(tmp_path / "bare.gpkg") == bare
