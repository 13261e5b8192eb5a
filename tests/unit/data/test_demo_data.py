"""The demo's files: what the script makes, and what reading them says."""

from __future__ import annotations

import csv
import io
import math

import pytest

from data import make_demo as script
from data.demo_words import COLUMNS, KINDS
from georoute.domain.findings import Severity
from georoute.register import check_register, read_programme, read_register
from tests.house_checks import ROOT

DEMO = ROOT / "data" / "demo"
# The programme's words for what was planted, and the code a check has for it.
CODES = {
    "missing id": "missing_id",
    "duplicate id": "duplicate_id",
    "missing coordinate": "missing_coordinate",
    "unreadable coordinate": "unreadable_coordinate",
    "swapped axes": "swapped_axes",
    "zero, zero": "zero_coordinate",
    "out of range": "coordinate_out_of_range",
    "far outlier": "far_outlier",
    "same place twice": "same_place",
    "negative work time": "negative_time",
    "absurd work time": "absurd_time",
    "text in a number": "text_in_number",
    "unreadable date": "unreadable_date",
}


@pytest.fixture(scope="module")
def rows() -> list[script.Row]:
    return list(csv.DictReader(io.StringIO((DEMO / "register.csv").read_text(encoding="utf-8"))))


def test_the_files_are_what_the_script_makes() -> None:
    made = script.demo_files(script.EXTRACT)
    assert {name: (DEMO / name).read_bytes() for name in made} == made
    assert {path.name for path in DEMO.iterdir()} == set(made)


def test_the_register_has_the_sites_it_should(rows: list[script.Row]) -> None:
    assert len(rows) == sum(kind.count for kind in KINDS) == 120
    assert tuple(rows[0]) == COLUMNS
    assert len({row["site_id"] for row in rows}) == len(rows)
    assert len({row["name"] for row in rows}) == len(rows)
    for row in rows:
        kind = next(kind for kind in KINDS if row["site_id"].startswith(kind.prefix))
        assert kind.work_min[0] <= int(row["work_min"]) <= kind.work_min[1]
        assert "@" not in row["contact"]


def test_sites_lie_beside_the_street_of_their_address(rows: list[script.Row]) -> None:
    by_street: dict[str, list[script.Stretch]] = {}
    for stretch in script.read_stretches(script.EXTRACT):
        by_street.setdefault(stretch.street, []).append(stretch)
    for row in rows:
        place = (float(row["lon"]), float(row["lat"]))
        away = [
            distance_m(place, stretch)
            for street, stretches in by_street.items()
            if row["address"].startswith(street + " ")
            for stretch in stretches
        ]
        assert 2.0 <= min(away) <= 11.0, row


def distance_m(place: tuple[float, float], stretch: script.Stretch) -> float:
    """Return the distance from a place to a stretch of street, in metres."""
    east, north = script.metres(stretch.start, place)
    along_east, along_north = script.metres(stretch.start, stretch.end)
    square = along_east**2 + along_north**2
    share = (east * along_east + north * along_north) / square if square else 0.0
    share = min(1.0, max(0.0, share))
    return math.hypot(east - share * along_east, north - share * along_north)


def test_the_register_reads_without_a_fault_or_a_warning() -> None:
    programme = read_programme(DEMO / "programme.toml")
    register, findings = read_register(DEMO / "register.csv", programme=programme)
    assert [finding for finding in findings if finding.severity is not Severity.NOTE] == []
    assert len(register.sites) == len(register.visits) == 120
    assert register.extra_columns == ("asset_material", "installed_year")
    assert register.sites[1].extra["asset_material"]


def test_the_programme_is_the_week_it_should_be() -> None:
    programme = read_programme(DEMO / "programme.toml")
    assert programme.zone == "America/Santiago"
    assert [day.isoformat() for day in programme.days] == [f"2027-03-0{n}" for n in range(1, 6)]
    assert len(programme.bases) == 2
    assert len(programme.inspectors) == 3
    assert 13 <= len(programme.shifts()) <= 15


def test_the_week_is_well_filled_but_not_full() -> None:
    programme = read_programme(DEMO / "programme.toml")
    register, _ = read_register(DEMO / "register.csv", programme=programme)
    longest_s = max(shift.paid_s + shift.overtime_limit_s for shift in programme.shifts())
    sizes_s = {visit.site_id: visit.work_s + visit.access_s for visit in register.visits}
    # One site is there to show how a reason reads: its work alone is longer than any shift.
    assert [site for site, size_s in sizes_s.items() if size_s > longest_s] == ["SIP-001"]
    work_s = sum(sizes_s.values()) - sizes_s["SIP-001"]
    there_s = sum(shift.paid_s - shift.write_up_s for shift in programme.shifts())
    assert 0.7 <= work_s / there_s <= 0.85  # travel comes on top


@pytest.mark.parametrize("fault", script.PLANTED, ids=lambda fault: str(fault.kind))
def test_every_planted_fault_is_found(fault: script.Planted) -> None:
    findings = check_register(DEMO / "register_dirty.csv")
    on_row = [finding for finding in findings if finding.row == fault.row]
    assert CODES[fault.kind] in {finding.code for finding in on_row}, on_row
    assert all(finding.remedy for finding in on_row)


def test_nothing_else_is_found_in_the_dirty_register() -> None:
    findings = check_register(DEMO / "register_dirty.csv")
    planted = {(fault.row, CODES[fault.kind]) for fault in script.PLANTED}
    found = {
        (finding.row, finding.code) for finding in findings if finding.severity is not Severity.NOTE
    }
    assert found == planted


def test_what_was_assumed_of_the_dirty_register_is_said() -> None:
    notes = {
        finding.code
        for finding in check_register(DEMO / "register_dirty.csv")
        if finding.severity is Severity.NOTE
    }
    assert {"separator_assumed", "decimal_comma_assumed"} <= notes
