"""Faults seeded into clean tables are found with row, column and remedy; clean tables are clean."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from georoute.domain.costs import Places
from georoute.domain.findings import Finding, Severity
from georoute.errors import TableError
from georoute.measure import check_table, read_table
from tests.measure_helpers import (
    FAULTS,
    UNKNOWN_ID,
    WARNINGS,
    Seeded,
    Seeder,
    long_rows,
    random_places,
    road_like,
    square_rows,
    write_rows,
)

SEEDS = range(5)


def seeded_table(folder: Path, seeder: Seeder, seed: int) -> tuple[Path, Places, Seeded]:
    places = random_places(7, seed)
    rows = long_rows(places, *road_like(places, seed), seed)
    seeded = seeder(rows, np.random.default_rng(seed))
    return write_rows(folder / "table.csv", rows), places, seeded


def matching(findings: tuple[Finding, ...], seeded: Seeded) -> list[Finding]:
    return [
        finding
        for finding in findings
        if (finding.code, finding.row, finding.column) == (seeded.code, seeded.row, seeded.column)
    ]


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("name", FAULTS)
def test_a_seeded_fault_is_found_with_row_and_remedy(tmp_path: Path, name: str, seed: int) -> None:
    path, places, seeded = seeded_table(tmp_path, FAULTS[name], seed)
    with pytest.raises(TableError) as caught:
        read_table(path, places)
    found = matching(caught.value.findings, seeded)
    assert found, caught.value.findings
    assert found[0].severity is Severity.FAULT
    assert found[0].file == "table.csv"
    assert found[0].remedy
    assert found[0].message
    assert check_table(path, places) == caught.value.findings


@pytest.mark.parametrize("seed", SEEDS)
@pytest.mark.parametrize("name", WARNINGS)
def test_a_seeded_oddity_is_a_warning_with_row_and_remedy(
    tmp_path: Path, name: str, seed: int
) -> None:
    path, places, seeded = seeded_table(tmp_path, WARNINGS[name], seed)
    _, findings = read_table(path, places)
    found = matching(findings, seeded)
    assert found, findings
    assert found[0].severity is Severity.WARNING
    assert found[0].remedy


@pytest.mark.parametrize("seed", SEEDS)
def test_an_unknown_id_is_a_warning_and_its_pair_is_missing(tmp_path: Path, seed: int) -> None:
    path, places, seeded = seeded_table(tmp_path, UNKNOWN_ID, seed)
    findings = check_table(path, places)
    assert matching(findings, seeded)[0].severity is Severity.WARNING
    assert [f.code for f in findings if f.is_fault] == ["missing_pair"]


def test_all_faults_come_at_once(tmp_path: Path) -> None:
    places = random_places(9, 3)
    rows = long_rows(places, *road_like(places, 3), 3)
    rng = np.random.default_rng(3)
    names = ["text", "nan", "negative", "diagonal", "half", "ragged row"]
    codes = {FAULTS[name](rows, rng).code for name in names}
    found = {f.code for f in check_table(write_rows(tmp_path / "t.csv", rows), places)}
    assert codes <= found


@pytest.mark.parametrize("seed", range(100))
def test_clean_tables_have_no_fault_and_no_warning(tmp_path: Path, seed: int) -> None:
    places = random_places(2 + seed % 11, seed)
    drive, dist = road_like(places, seed)
    path = write_rows(tmp_path / "t.csv", long_rows(places, drive, dist, seed))
    costs, findings = read_table(path, places)
    assert {f.code for f in findings} <= {"asymmetry"}
    np.testing.assert_array_equal(costs.travel_s, drive)
    np.testing.assert_array_equal(costs.length_m, dist)
    assert not costs.estimated
    assert costs.place_ids == places.ids


@pytest.mark.parametrize(
    ("row", "column", "text", "code"),
    [
        (0, 2, "P-0", "duplicate_id"),
        (0, 2, "elsewhere", "unknown_id"),
        (0, 2, "", "missing_id"),
        (2, 0, "P-0", "duplicate_id"),
        (2, 0, "elsewhere", "unknown_id"),
        (2, 0, "", "missing_id"),
        (2, 3, "far", "text_in_number"),
        (2, 3, "nan", "not_a_number"),
        (2, 3, "-4", "negative"),
        (2, 2, "12", "diagonal_not_zero"),
        (2, 3, "", "half_given"),
    ],
)
@pytest.mark.parametrize("layer", ["drive_s", "dist_m"])
def test_a_fault_in_a_square_table_is_found_in_its_cell(
    tmp_path: Path, layer: str, row: int, column: int, text: str, code: str
) -> None:
    places = random_places(5, 8)
    drive, dist = road_like(places, 8)
    tables = {"drive_s": square_rows(places, drive), "dist_m": square_rows(places, dist)}
    tables[layer][row][column] = text
    for name, rows in tables.items():
        write_rows(tmp_path / f"{name}.csv", rows)
    findings = [f for f in check_table(tmp_path, places) if f.code == code]
    assert findings
    assert findings[0].file == f"{layer}.csv"
    assert findings[0].row == row + 1
    assert findings[0].remedy
    if row and column:
        assert findings[0].column == places.ids[column - 1]
        assert findings[0].subject == places.ids[row - 1]


def test_a_square_table_without_a_place_says_which(tmp_path: Path) -> None:
    places = random_places(5, 8)
    drive, dist = road_like(places, 8)
    short = [row for row in square_rows(places, drive) if row[0] != "P-3"]
    write_rows(tmp_path / "drive_s.csv", short)
    write_rows(tmp_path / "dist_m.csv", [row[:-1] for row in square_rows(places, dist)])
    faults = [f for f in check_table(tmp_path, places) if f.is_fault]
    assert [(f.code, f.file, f.subject) for f in faults] == [
        ("place_not_in_table", "drive_s.csv", "P-3"),
        ("place_not_in_table", "dist_m.csv", "P-4"),
    ]
    assert "from it" in faults[0].message
    assert "to it" in faults[1].message


def test_many_faults_of_a_kind_are_counted(tmp_path: Path) -> None:
    places = random_places(40, 1)
    drive, dist = road_like(places, 1)
    path = write_rows(tmp_path / "t.csv", long_rows(places, -1 - drive, dist, 1))
    with pytest.raises(TableError, match=r"1,600 faults") as caught:
        read_table(path, places)
    negative = [f for f in caught.value.findings if f.code == "negative"]
    assert len(negative) == 1001
    assert "560 more" in negative[-1].message
