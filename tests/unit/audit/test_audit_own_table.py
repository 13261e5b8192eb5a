"""Legs of a plan made on the user's own table are checked against the table, read again."""

from __future__ import annotations

import csv
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from georoute.audit import audit
from georoute.domain.findings import Severity
from georoute.domain.plan import Plan
from georoute.domain.programme import TravelMethod
from tests.store_breaches import programme
from tests.store_clock import Measure, measure_of
from tests.store_helpers import example_plan

Writer = Callable[[Path, list[str], Measure], Path]


def _number(value: float, *, comma: bool) -> str:
    return f"{value:.3f}".replace(".", ",") if comma else f"{value:.3f}"


def _write(path: Path, rows: list[list[str]], delimiter: str) -> None:
    with path.open("w", encoding="utf-8-sig", newline="") as stream:
        csv.writer(stream, delimiter=delimiter).writerows(rows)


def long_form(folder: Path, ids: list[str], measure: Measure) -> Path:
    """Commas; a place to itself is left out."""
    rows = [["from_id", "to_id", "drive_s", "dist_m"]]
    for a in ids:
        for b in ids:
            if a != b:
                seconds, metres = measure(a, b)
                rows.append([a, b, _number(seconds, comma=False), _number(metres, comma=False)])
    _write(folder / "own.csv", rows, ",")
    return folder / "own.csv"


def square_form(folder: Path, ids: list[str], measure: Measure) -> Path:
    """Semicolons and decimal commas, two files named alike."""
    for k, name in enumerate(("drive_s", "dist_m")):
        rows = [["", *ids]]
        rows += [[a, *(_number(measure(a, b)[k], comma=True) for b in ids)] for a in ids]
        _write(folder / f"own_{name}.csv", rows, ";")
    return folder / "own_dist_m.csv"


def square_form_by_seconds(folder: Path, ids: list[str], measure: Measure) -> Path:
    """The same two files, named by the other one."""
    square_form(folder, ids, measure)
    return folder / "own_drive_s.csv"


def folder_form(folder: Path, ids: list[str], measure: Measure) -> Path:
    """Tabs, in a folder of two files."""
    for k, name in enumerate(("drive_s", "dist_m")):
        rows = [["id", *ids]]
        rows += [[a, *(_number(measure(a, b)[k], comma=False) for b in ids)] for a in ids]
        _write(folder / f"{name}.csv", rows, "\t")
    return folder


def planned_on(table_path: str) -> Plan:
    """The example plan, its geodesic legs declared to come from a table."""
    plan = example_plan(TravelMethod.GEODESIC)
    travel = replace(plan.programme.travel, method=TravelMethod.TABLE, table_path=table_path)
    return programme(replace(plan, travel=replace(plan.travel, estimated=False)), travel=travel)


def table_of(write: Writer, folder: Path) -> Path:
    plan = example_plan(TravelMethod.GEODESIC)
    ids = [base.base_id for base in plan.programme.bases] + [s.site_id for s in plan.sites]
    return write(folder, ids, measure_of(plan.programme, plan.sites))


@pytest.mark.parametrize("write", [long_form, square_form, square_form_by_seconds, folder_form])
def test_plan_on_its_own_table_is_sound(write: Writer, tmp_path: Path) -> None:
    assert audit(planned_on(str(table_of(write, tmp_path)))) == ()


def test_table_is_found_beside_the_programme_file(tmp_path: Path) -> None:
    table_of(long_form, tmp_path)
    plan = programme(planned_on("own.csv"), source=str(tmp_path / "programme.toml"))
    assert audit(plan) == ()


@pytest.mark.parametrize(("column", "code"), [("drive_s", "leg_time"), ("dist_m", "leg_length")])
def test_leg_that_differs_from_the_table_is_found(column: str, code: str, tmp_path: Path) -> None:
    path = table_of(long_form, tmp_path)
    with path.open(encoding="utf-8-sig", newline="") as stream:
        rows = list(csv.reader(stream))
    place = rows[0].index(column)
    for row in rows[1:]:
        if row[:2] == ["03", "04"]:
            row[place] = f"{float(row[place]) + 1:.3f}"
    _write(path, rows, ",")
    findings = [finding for finding in audit(planned_on(str(path))) if finding.is_fault]
    assert code in {finding.code for finding in findings}
    # The same leg is also in the log of exchanges, so its gain no longer adds up.
    assert {finding.code for finding in findings} <= {code, "exchange_gain"}
    assert "03 → 04" in next(f.message for f in findings if f.code == code)


def test_leg_without_a_way_is_found(tmp_path: Path) -> None:
    path = table_of(long_form, tmp_path)
    text = path.read_text(encoding="utf-8-sig").splitlines(keepends=True)
    path.write_text("".join(line for line in text if not line.startswith("04,05,")), "utf-8")
    codes = {finding.code for finding in audit(planned_on(str(path)))}
    assert codes == {"unreachable_leg"}


@pytest.mark.parametrize("content", [None, "", "from_id,to_id,drive_s,dist_m\n03,04,many,1\n"])
def test_table_that_cannot_be_read_is_a_warning(content: str | None, tmp_path: Path) -> None:
    path = tmp_path / "own.csv"
    if content is not None:
        path.write_text(content, "utf-8")
    findings = audit(planned_on(str(path)))
    assert [finding.code for finding in findings] == ["table_missing"]
    assert findings[0].severity is Severity.WARNING
    assert findings[0].remedy
