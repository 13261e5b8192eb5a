"""A plan file says some things twice; what only repeats the plan is checked against it."""

from __future__ import annotations

import sqlite3
from contextlib import closing
from pathlib import Path

import pytest

from georoute.store import check_derived, read_plan, write_plan
from tests.store_helpers import example_plan


@pytest.fixture
def plan_file(tmp_path: Path) -> Path:
    path = tmp_path / "plan.gpkg"
    write_plan(example_plan(), path)
    return path


def edit(path: Path, statement: str) -> None:
    with closing(sqlite3.connect(path)) as connection, connection:
        # The triggers and functions of a spatial extension are not there; none is needed.
        connection.execute(statement)


def test_a_file_as_it_was_written_has_nothing_to_say(plan_file: Path) -> None:
    assert check_derived(plan_file) == ()


@pytest.mark.parametrize(
    ("statement", "column"),
    [
        ("UPDATE stops SET geom = (SELECT geom FROM bases LIMIT 1) WHERE fid = 1", "stops.geom"),
        ("UPDATE stops SET name = 'elsewhere' WHERE fid = 2", "stops.name"),
        ("UPDATE legs SET geom = (SELECT geom FROM legs WHERE fid = 2) WHERE fid = 1", "legs.geom"),
    ],
)
def test_a_changed_repetition_is_found_with_its_row_and_column(
    plan_file: Path, statement: str, column: str
) -> None:
    before = read_plan(plan_file)
    edit(plan_file, statement)
    assert read_plan(plan_file) == before
    (finding,) = check_derived(plan_file)
    assert finding.is_fault
    assert finding.column == column
    assert finding.row is not None
    assert finding.remedy
