"""The forms of a travel table, its encodings, and what is said about it as a whole."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from georoute.domain.costs import Places
from georoute.domain.findings import Severity
from georoute.errors import TableError
from georoute.measure import check_table, read_table
from tests.measure_helpers import (
    long_rows,
    random_places,
    road_like,
    square_rows,
    write_rows,
)

PLACES = random_places(6, 21)
DRIVE, DIST = road_like(PLACES, 21)


def codes(path: Path) -> list[str]:
    return [finding.code for finding in check_table(path, PLACES)]


def test_both_square_files_are_found_from_either_and_from_the_folder(tmp_path: Path) -> None:
    seconds = write_rows(tmp_path / "drive_s.csv", square_rows(PLACES, DRIVE))
    metres = write_rows(tmp_path / "dist_m.csv", square_rows(PLACES, DIST))
    for path in (seconds, metres, tmp_path):
        costs, _ = read_table(path, PLACES)
        np.testing.assert_array_equal(costs.travel_s, DRIVE)
        np.testing.assert_array_equal(costs.length_m, DIST)
        assert costs.source == "own table drive_s.csv and dist_m.csv"


def test_the_order_of_a_square_table_is_free(tmp_path: Path) -> None:
    order = np.array([3, 0, 5, 1, 4, 2])
    shuffled = random_places(6, 21)
    ids = tuple(shuffled.ids[k] for k in order)
    for name, figures in (("drive_s", DRIVE), ("dist_m", DIST)):
        rows = square_rows(PLACES, figures[np.ix_(order, order)])
        rows[0][1:] = ids
        for row, place_id in zip(rows[1:], ids, strict=True):
            row[0] = place_id
        write_rows(tmp_path / f"{name}.csv", rows)
    costs, _ = read_table(tmp_path, PLACES)
    np.testing.assert_array_equal(costs.travel_s, DRIVE)
    np.testing.assert_array_equal(costs.length_m, DIST)


def test_semicolons_decimal_commas_and_a_byte_order_mark_are_read_and_told(tmp_path: Path) -> None:
    rows = long_rows(PLACES, DRIVE + 0.5 * (DRIVE > 0), DIST, 4)
    rows = [[cell.replace(".", ",") for cell in row] for row in rows]
    path = write_rows(tmp_path / "t.csv", rows, delimiter=";")
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    costs, findings = read_table(path, PLACES)
    np.testing.assert_array_equal(costs.travel_s, DRIVE + 0.5 * (DRIVE > 0))
    note = next(f for f in findings if f.code == "delimiter")
    assert note.severity is Severity.NOTE
    assert "semicolons" in note.message


def test_quoted_ids_blank_rows_more_columns_and_an_absent_diagonal_are_fine(
    tmp_path: Path,
) -> None:
    rows = long_rows(PLACES, DRIVE, DIST, 4)
    rows = [[*row, "spare"] for row in rows if row[0] != row[1]]
    quoted = [[f'"{cell}"' for cell in row] for row in rows]
    quoted.insert(9, [])
    quoted.insert(20, [""] * 4)
    costs, findings = read_table(write_rows(tmp_path / "t.csv", quoted), PLACES)
    np.testing.assert_array_equal(costs.travel_s, DRIVE)
    assert [f.code for f in findings] == ["asymmetry", "asymmetry"]


def test_rows_are_counted_across_blank_rows(tmp_path: Path) -> None:
    rows = long_rows(PLACES, DRIVE, DIST, 4)
    rows[30][2] = "soon"
    rows.insert(9, [])
    faults = [f for f in check_table(write_rows(tmp_path / "t.csv", rows), PLACES) if f.is_fault]
    assert [(f.row, f.value) for f in faults] == [(32, "soon")]


@pytest.mark.parametrize(
    ("content", "code"),
    [
        (b"", "empty_file"),
        (b"\r\n", "empty_file"),
        (b"from_id,to_id,drive_s,dist_m\r\n", "empty_file"),
        (b"from_id,to_id,drive_s,dist_m\r\n\xe9,P-1,1,1\r\n", "unreadable_text"),
        (b"\xff\xfef\x00r\x00", "unreadable_text"),
        (b'from_id,to_id,drive_s,dist_m\r\n"P-1"x,P-1,1,1\r\n', "unreadable_csv"),
        (b'"from_id', "unreadable_csv"),
        (b"a,b,c\r\n1,2,3\r\n", "unknown_form"),
        (b"from_id,to_id,minutes\r\n1,2,3\r\n", "missing_column"),
    ],
)
def test_a_file_that_is_no_table_is_told_apart(tmp_path: Path, content: bytes, code: str) -> None:
    path = tmp_path / "t.csv"
    path.write_bytes(content)
    found = [f for f in check_table(path, PLACES) if f.code == code]
    assert found
    assert found[0].is_fault
    assert found[0].remedy


def test_a_file_that_is_not_there_is_a_fault(tmp_path: Path) -> None:
    with pytest.raises(TableError, match="no such file"):
        read_table(tmp_path / "none.csv", PLACES)
    write_rows(tmp_path / "drive_s.csv", square_rows(PLACES, DRIVE))
    assert codes(tmp_path) == ["missing_file"]
    assert codes(tmp_path / "drive_s.csv") == ["missing_file"]


def test_unreachable_pairs_are_infinite_and_reported_with_groups(tmp_path: Path) -> None:
    drive, dist = DRIVE.copy(), DIST.copy()
    rows = long_rows(PLACES, drive, dist, 4)
    for row in rows[1:]:
        if (row[0] in {"P-0", "P-1"}) != (row[1] in {"P-0", "P-1"}):
            row[2:] = ["", ""]
    costs, findings = read_table(write_rows(tmp_path / "t.csv", rows), PLACES)
    assert int(np.isinf(costs.travel_s).sum()) == 16
    np.testing.assert_array_equal(np.isinf(costs.travel_s), np.isinf(costs.length_m))
    pairs = next(f for f in findings if f.code == "unreachable_pairs")
    assert "16 of 30 pairs" in pairs.message
    assert "2 groups" in pairs.message
    cut_off = [f for f in findings if f.code == "unreachable_place"]
    assert [f.subject for f in cut_off] == ["P-0", "P-1"]
    assert all("no way to or from" in f.message for f in cut_off)


@pytest.mark.parametrize(("end", "words"), [(1, "not left again"), (0, "but not entered")])
def test_a_place_open_one_way_only_says_which_way(tmp_path: Path, end: int, words: str) -> None:
    rows = long_rows(PLACES, DRIVE, DIST, 4)
    for row in rows[1:]:
        if row[1 - end] == "P-2" and row[end] != "P-2":
            row[2:] = ["inf", "inf"]
    findings = check_table(write_rows(tmp_path / "t.csv", rows), PLACES)
    (cut_off,) = [f for f in findings if f.code == "unreachable_place"]
    assert cut_off.subject == "P-2"
    assert words in cut_off.message


def test_a_table_without_any_way_is_a_fault(tmp_path: Path) -> None:
    rows = long_rows(PLACES, DRIVE, DIST, 4)
    for row in rows[1:]:
        row[2:] = ["", ""]
    found = check_table(write_rows(tmp_path / "t.csv", rows), PLACES)
    assert [f.code for f in found if f.is_fault] == ["nothing_reachable"]


def test_asymmetry_is_the_mean_difference_over_the_mean(tmp_path: Path) -> None:
    places = random_places(2, 1)
    rows = [["from_id", "to_id", "drive_s", "dist_m"], ["P-0", "P-1", "9000", "90000"]]
    rows.append(["P-1", "P-0", "11000", "90000"])
    found = check_table(write_rows(tmp_path / "t.csv", rows), places)
    notes = {f.column: f.value for f in found if f.code == "asymmetry"}
    assert notes == {"drive_s": "20.0 %", "dist_m": "0.0 %"}


def test_the_worst_triangle_is_named_with_its_third_place(tmp_path: Path) -> None:
    drive = DRIVE.copy()
    drive[4, 1] = 50_000.0
    drive[2, 3] = 40_000.0
    over = int(np.argmin([drive[4, j] + drive[j, 1] if j not in {1, 4} else 1e9 for j in range(6)]))
    path = write_rows(tmp_path / "t.csv", long_rows(PLACES, drive, DIST, 4))
    (found,) = [f for f in check_table(path, PLACES) if f.code == "triangle_break"]
    assert found.subject == "P-4"
    assert f"over P-{over}: the worst of 2 pairs" in found.message


def test_minutes_for_seconds_are_noticed(tmp_path: Path) -> None:
    path = write_rows(tmp_path / "t.csv", long_rows(PLACES, DRIVE / 60, DIST, 4))
    assert "odd_units" in codes(path)


def test_kilometres_for_metres_are_noticed(tmp_path: Path) -> None:
    path = write_rows(tmp_path / "t.csv", long_rows(PLACES, DRIVE, DIST / 1000, 4))
    assert {"odd_units", "shorter_than_straight_line"} <= set(codes(path))


def test_one_place_needs_no_rows_but_its_own(tmp_path: Path) -> None:
    place = random_places(1, 5)
    rows = [["from_id", "to_id", "drive_s", "dist_m"], ["P-0", "P-0", "0", "0"]]
    costs, findings = read_table(write_rows(tmp_path / "t.csv", rows), place)
    assert costs.travel_s.tolist() == [[0.0]]
    assert findings == ()


def test_places_at_one_point_may_be_no_travel_apart(tmp_path: Path) -> None:
    place = Places(ids=("P-0", "P-1"), lat_deg=np.full(2, -30.0), lon_deg=np.full(2, -71.0))
    zero = np.zeros((2, 2))
    path = write_rows(tmp_path / "t.csv", long_rows(place, zero, zero, 1))
    costs, _ = read_table(path, place)
    assert not costs.travel_s.any()
