"""Headers, aliases and mapping; single cells; what a row becomes."""

from __future__ import annotations

from collections.abc import Mapping
from datetime import date, datetime
from pathlib import Path

import pytest

from georoute.domain.findings import Finding
from georoute.register import COLUMNS, check_register, read_register
from georoute.register.values import Refusal, read_date, read_number, read_yes_no
from tests.spine_helpers import small_programme

ROW = "S1,-29.9,-71.2"


def write(path: Path, headers: str, *rows: str) -> Path:
    path.write_text("\n".join([headers, *rows]), encoding="utf-8")
    return path


def found(path: Path, columns: Mapping[str, str] | None = None) -> list[tuple[str, str]]:
    findings = check_register(path, columns=columns)
    assert all(finding.remedy for finding in findings)
    return [(finding.code, finding.column) for finding in findings]


def test_the_table_of_columns_names_each_header_once() -> None:
    names = [word for column in COLUMNS for word in (column.name, *column.aliases)]
    assert len(names) == len(set(names))
    assert all(column.meaning.endswith(".") for column in COLUMNS)
    assert [column.name for column in COLUMNS if column.required] == ["site_id", "lat", "lon"]


@pytest.mark.parametrize(
    ("headers", "due"),
    [
        ("site_id,lat,lon,due_date", "due_date"),
        ("SITE_ID,Lat,LON,Due Date", "Due Date"),
        (" Site-ID ,Latitude,Longitude,due", "due"),
        ("site id,y,x,DUE", "DUE"),
    ],
)
def test_names_and_aliases_are_found_whatever_their_case(
    headers: str, due: str, tmp_path: Path
) -> None:
    register, findings = read_register(write(tmp_path / "r.csv", headers, f"{ROW},2027-03-01"))
    assert findings == ()
    assert register.visits[0].due == date(2027, 3, 1)
    assert register.extra_columns == ()
    wrong = write(tmp_path / "w.csv", headers, f"{ROW},soon")
    assert found(wrong) == [("unreadable_date", due)]


@pytest.mark.parametrize(
    ("headers", "missing"),
    [
        ("lat,lon,name", ["site_id"]),
        ("site_id,lon,name", ["lat"]),
        ("site_id,lat,name", ["lon"]),
        ("name,address,notes", ["site_id", "lat", "lon"]),
    ],
)
def test_missing_columns(headers: str, missing: list[str], tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", headers, "1,2,3")
    assert found(path) == [("missing_column", column) for column in missing]


def test_a_missing_column_names_the_header_that_looks_like_it(tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", "site_nr,lat,lon", ROW)
    (finding,) = check_register(path)
    assert "`site_nr`" in finding.message
    assert 'site_id = "…"' in finding.remedy


@pytest.mark.parametrize(
    ("headers", "expected"),
    [
        ("site_id,lat,lon,Notes,notes", [("duplicate_header", "notes")]),
        ("site_id,lat,lon,asset,Asset", [("duplicate_header", "Asset")]),
        ("site_id,lat,lon,lat,a", [("duplicate_header", "lat")]),
        ("site_id,latitude,lon,y,a", [("duplicate_header", "y")]),
        ("site_id,lat,lon,y,a", [("second_column", "y")]),
        ("site_id,lat,lon,due_date,due", [("second_column", "due")]),
        ("site_id,lat,lon,,a", [("empty_header", "column_4")]),
        ("site_id,lat,lon,wrok_min,a", [("similar_column", "wrok_min")]),
        ("site_id,lat,lon,due_dat,a", [("similar_column", "due_dat")]),
        ("site_id,lat,lon,opening_hours,a", [("column_without_effect", "opening_hours")]),
        ("site_id,lat,lon,Risk Band,a", [("column_without_effect", "Risk Band")]),
    ],
)
def test_doubtful_headers(headers: str, expected: list[tuple[str, str]], tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", headers, f"{ROW},,", "S2,-29.91,-71.2,2027-03-01,")
    assert found(path) == expected


def test_foreign_headers_are_mapped(tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", "Nr,Breite,Länge,Dauer,Art", "007,-29.9,-71.2,45,Stahl")
    columns = {"site_id": "Nr", "lat": "Breite", "lon": "länge", "work_min": "Dauer"}
    register, findings = read_register(path, columns=columns)
    assert findings == ()
    assert register.sites[0].site_id == "007"
    assert register.visits[0].work_s == 45 * 60
    assert register.extra_columns == ("Art",)
    assert dict(register.sites[0].extra) == {"Art": "Stahl"}


def test_a_mapping_wins_over_the_name(tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", "site_id,lat,lon,code", f"{ROW},A7")
    register, _ = read_register(path, columns={"site_id": "code"})
    assert register.sites[0].site_id == "A7"
    assert dict(register.sites[0].extra) == {"site_id": "S1"}


@pytest.mark.parametrize("header", ["Breit", "lattitude", "nothing like it"])
def test_a_mapping_to_an_absent_header_names_the_nearest(header: str, tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", "site_id,Breite,lon,latitude", f"{ROW},1")
    (finding,) = check_register(path, columns={"lat": header})
    assert (finding.code, finding.column, finding.value) == ("mapped_header_absent", "lat", header)
    nearest = {"Breit": "`Breite`", "lattitude": "`latitude`"}.get(header, "known are `site_id`")
    assert nearest in finding.remedy


@pytest.mark.parametrize("name", ["siteid", "latt", "anything"])
def test_a_mapping_of_an_unknown_column(name: str, tmp_path: Path) -> None:
    path = write(tmp_path / "r.csv", "site_id,lat,lon", ROW)
    assert found(path, {name: "lat"}) == [("unknown_mapping", name)]


def test_a_row_becomes_a_site_and_a_visit(tmp_path: Path) -> None:
    headers = (
        "site_id,name,address,lat,lon,task,work_min,access_min,earliest,due,latest,load,worth,"
        "must,inspector,contact,notes,colour"
    )
    row = (
        "01,Quay,Street 1,-29.9,-71.2,valve,20,2.5,2027-03-01,2027-03-02,2027-03-03,1.5,80,yes,"
        "i1; i2,desk 3,ring twice,red"
    )
    register, findings = read_register(
        write(tmp_path / "r.csv", headers, row), programme=small_programme()
    )
    assert findings == ()
    (site,), (visit,) = register.sites, register.visits
    assert (site.site_id, site.name, site.address) == ("01", "Quay", "Street 1")
    assert (site.contact, site.notes, dict(site.extra)) == (
        "desk 3",
        "ring twice",
        {"colour": "red"},
    )
    assert (visit.visit_id, visit.task) == ("01|valve|1", "valve")
    assert (visit.work_s, visit.access_s, visit.load, visit.worth) == (1200.0, 150.0, 1.5, 80.0)
    assert (visit.earliest, visit.due) == (date(2027, 3, 1), date(2027, 3, 2))
    assert (visit.latest, visit.must) == (date(2027, 3, 3), True)
    assert visit.inspector_ids == {"i1", "i2"}


def test_what_a_row_leaves_out_comes_from_the_programme(tmp_path: Path) -> None:
    programme = small_programme(default_work_s=777.0, default_access_s=33.0)
    path = write(tmp_path / "r.csv", "site_id,lat,lon", ROW)
    (visit,) = read_register(path, programme=programme)[0].visits
    assert (visit.work_s, visit.access_s, visit.task) == (777.0, 33.0, "inspection")
    assert (visit.worth, visit.must, visit.inspector_ids) == (None, False, frozenset())
    (visit,) = read_register(path, programme=programme, default_work_s=1.0)[0].visits
    assert (visit.work_s, visit.access_s) == (1.0, 33.0)


def test_what_only_a_programme_can_tell(tmp_path: Path) -> None:
    rows = [f"S{k},-29.9{k},-71.2,,," for k in range(10)]
    for k, who in ((1, "i3"), (2, "i1;j2"), (3, "Inspector 1")):
        rows[k] = f"S{k},-29.9{k},-71.2,{who},,"
    for k, dates in ((4, ",2027-02-28"), (5, "2027-03-03,"), (6, ",2026-01-01")):
        rows[k] = f"S{k},-29.9{k},-71.2,,{dates}"
    rows[7] = "base,-29.97,-71.2,,,"
    path = write(tmp_path / "r.csv", "site_id,lat,lon,inspector,earliest,latest", *rows)
    findings: tuple[Finding, ...] = check_register(path, programme=small_programme())
    assert [(f.row, f.column, f.code) for f in findings] == [
        (3, "inspector", "unknown_inspector"),
        (4, "inspector", "unknown_inspector"),
        (5, "inspector", "unknown_inspector"),
        (6, "latest", "outside_horizon"),
        (7, "earliest", "outside_horizon"),
        (8, "latest", "outside_horizon"),
        (9, "site_id", "id_of_a_base"),
    ]
    assert check_register(path) == ()


# ISO 8601 uses 12 April 1985 in its own examples: calendar date 5.2.1.1 (basic and extended),
# week date 5.2.3.1, date and time 5.4.1 (edition 2000).
@pytest.mark.parametrize(
    "text",
    [
        "19850412",
        "1985-04-12",
        "1985W155",
        "1985-W15-5",
        "19850412T101530",
        "1985-04-12T10:15:30",
        "1985-04-12T10:15:30+04:00",
        "1985-04-12 10:15",
        "1985-04-12T10:15:30Z",
    ],
)
def test_iso_8601_dates_are_read(text: str) -> None:
    assert read_date(text) == date(1985, 4, 12)


def test_date_cells_are_read() -> None:
    assert read_date(date(1985, 4, 12)) == date(1985, 4, 12)
    assert read_date(datetime(1985, 4, 12, 10, 15)) == date(1985, 4, 12)  # noqa: DTZ001 - as in sheets


@pytest.mark.parametrize(
    ("text", "remedy"),
    [
        ("03/04/2027", "2027-04-03 or 2027-03-04"),
        ("13/04/2027", "probably 2027-04-13"),
        ("04/13/27", "probably 2027-04-13"),
        ("04.04.2027", "probably 2027-04-04"),
        ("46115", "date format"),
        ("2027/4/3", "YYYY-MM-DD"),
        ("1985102", "YYYY-MM-DD"),  # an ordinal date: too easily a mistyped one
        ("٢٠٢٧-٠٣-٠١", "YYYY-MM-DD"),  # noqa: RUF001 - digits of another script
    ],
)
def test_other_dates_are_refused_with_the_right_form(text: str, remedy: str) -> None:
    refusal = read_date(text)
    assert isinstance(refusal, Refusal)
    assert remedy in refusal.remedy


@pytest.mark.parametrize(
    ("text", "value"),
    [("5", 5.0), (" +5.50 ", 5.5), (".5", 0.5), ("5.", 5.0), ("1e3", 1000.0), ("\u22122", -2.0)],
)
def test_numbers_are_read(text: str, value: float) -> None:
    assert read_number(text, decimal_comma=False) == value
    assert read_number(text.replace(".", ","), decimal_comma=True) == value


@pytest.mark.parametrize("text", ["1_000", "0x1F", "١٢", "1 000", "5h", "", "--1", "1.2.3", "½"])
def test_what_python_might_take_for_a_number_is_refused(text: str) -> None:
    assert isinstance(read_number(text, decimal_comma=False), Refusal)
    assert isinstance(read_number(text, decimal_comma=True), Refusal)


def test_cells_of_other_kinds_are_no_numbers() -> None:
    for cell in (True, date(2027, 3, 1), float("nan"), float("inf"), 10**400):
        assert isinstance(read_number(cell, decimal_comma=False), Refusal)
    assert read_number(7, decimal_comma=False) == 7.0


@pytest.mark.parametrize(("cell", "answer"), [("Yes", True), ("n", False), (1, True), (0.0, False)])
def test_yes_and_no(cell: str | float, *, answer: bool) -> None:
    assert read_yes_no(cell) is answer
