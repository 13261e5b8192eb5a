"""Files of every format: what is read, what is assumed, and what is refused."""

from __future__ import annotations

from pathlib import Path

import geopandas
import openpyxl
import pytest
import shapely

from georoute.domain.findings import Finding, Severity
from georoute.errors import RegisterError
from georoute.register import check_register, read_register
from tests import register_helpers as helpers


def codes(findings: tuple[Finding, ...]) -> list[str]:
    return [finding.code for finding in findings]


def only(path: Path, **settings: str) -> Finding:
    """Return the one finding of a file."""
    (finding,) = check_register(path, **settings)  # type: ignore[arg-type] # text settings only
    assert finding.remedy
    return finding


def saved(path: Path, content: str | bytes) -> Path:
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    return path


# RFC 4180, section 2: the examples of rules 1, 2, 5, 6 and 7, as names of sites.
@pytest.mark.parametrize(
    ("cell", "read"),
    [
        ("aaa", "aaa"),
        ('"aaa"', "aaa"),
        ('"b \r\nbb"', "b \r\nbb"),
        ('"b""bb"', 'b"bb'),
        ('"a,b"', "a,b"),
        (" a ", " a "),  # rule 4: spaces are part of a field
    ],
)
def test_cells_are_read_as_rfc_4180_says(cell: str, read: str, tmp_path: Path) -> None:
    text = f"site_id,name,lat,lon\r\nS1,{cell},1,2\r\nS2,zzz,1.1,2"  # the last line may lack an end
    register, findings = read_register(saved(tmp_path / "r.csv", text))
    assert findings == ()
    assert [site.name for site in register.sites] == [read, "zzz"]
    assert [site.row for site in register.sites] == [2, 3]


@pytest.mark.parametrize("broken", ['"a"b', '"never closed', '"a" '])
def test_broken_quotes_are_a_fault_with_their_row(broken: str, tmp_path: Path) -> None:
    text = f"site_id,lat,lon,name\nS1,1,2,x\nS2,1.1,2,{broken}\n"
    finding = only(saved(tmp_path / "r.csv", text))
    assert (finding.code, finding.row) == ("broken_quotes", 3)


@pytest.mark.parametrize("ends", ["\n", "\r\n", "\r"])
def test_all_line_ends_are_read(ends: str, tmp_path: Path) -> None:
    text = ends.join(["site_id,lat,lon", "007,1,2", "008,1.1,2"])
    register, _ = read_register(saved(tmp_path / "r.csv", text))
    assert [site.site_id for site in register.sites] == ["007", "008"]


@pytest.mark.parametrize(
    ("encoding", "note"),
    [
        ("utf-8", []),
        ("utf-8-sig", ["encoding_assumed"]),
        ("utf-16", ["encoding_assumed"]),
        ("cp1252", ["encoding_assumed"]),
    ],
)
def test_encodings_are_told(encoding: str, note: list[str], tmp_path: Path) -> None:
    text = "site_id,lat,lon,name\nA,1,2,Œuvre Ñandú\n"
    register, findings = read_register(saved(tmp_path / "r.csv", text.encode(encoding)))
    assert codes(findings) == note
    assert register.sites[0].name == "Œuvre Ñandú"


@pytest.mark.parametrize(
    "data", [b"\x00\x01\x02", b"\xff\xfe\x00", b"a\x81b,\xff", bytes(range(256)), b"a\0b,lat,lon"]
)
def test_what_is_no_text_is_refused(data: bytes, tmp_path: Path) -> None:
    assert only(saved(tmp_path / "r.csv", data)).code == "unknown_encoding"


@pytest.mark.parametrize(
    ("separator", "comma", "notes"),
    [
        (",", False, []),
        (";", False, ["separator_assumed"]),
        (";", True, ["separator_assumed", "decimal_comma_assumed"]),
        ("\t", True, ["separator_assumed", "decimal_comma_assumed"]),
    ],
)
def test_separators_and_decimal_marks_are_told(
    separator: str, comma: bool, notes: list[str], tmp_path: Path
) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    data = helpers.csv_bytes(rows, separator=separator, decimal_comma=comma)
    register, findings = read_register(saved(tmp_path / "r.csv", data))
    assert codes(findings) == notes
    assert all(finding.severity is Severity.NOTE for finding in findings)
    assert register.sites[3].lat_deg == float(rows[3]["lat"])


def test_a_decimal_point_among_commas_is_a_fault(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    for k in (4, 5, 6):
        rows[k]["worth"] = "1,5"
    data = helpers.csv_bytes(rows, separator=";", decimal_comma=True)
    text = data.decode().replace("1,5;no", "1.5;no")
    found = [f for f in check_register(saved(tmp_path / "r.csv", text)) if f.is_fault]
    assert [(f.row, f.column, f.code) for f in found] == [
        (row, "worth", "decimal_point") for row in (6, 7, 8)
    ]


@pytest.mark.parametrize(
    ("name", "content", "code"),
    [
        ("r.csv", b"", "empty_file"),
        ("r.csv", b" \r\n\r\n", "empty_file"),
        ("r.csv", b"\xef\xbb\xbf", "empty_file"),
        ("r.xlsx", b"", "empty_file"),
        ("r.geojson", b"", "empty_file"),
        ("r.csv", b"site_id,lat,lon\n", "no_rows"),
        ("r.csv", b"site_id;lat;lon\n;;\n\n", "no_rows"),
        ("r.geojson", b'{"type":"FeatureCollection","features":[]}', "no_rows"),
        ("r.xls", b"\xd0\xcf\x11\xe0", "unknown_format"),
        ("r.odd", b"\0\1\2", "unknown_format"),
        ("r.pdf2", b"abc", "unknown_format"),
        ("r.xlsx", b"abc", "damaged_file"),
        ("r.gpkg", b"abc", "damaged_file"),
        ("r.geojson", b'{"type":', "damaged_file"),
    ],
)
def test_files_that_hold_no_register(name: str, content: bytes, code: str, tmp_path: Path) -> None:
    findings = [f for f in check_register(saved(tmp_path / name, content)) if f.is_fault]
    assert code in codes(tuple(findings))
    assert all(finding.remedy for finding in findings)


def test_absent_files_and_folders(tmp_path: Path) -> None:
    for name in ("no.csv", "no.xlsx", "no.gpkg"):
        assert only(tmp_path / name).code == "file_not_found"
    for name in ("a.csv", "b.xlsx", "c"):
        (tmp_path / name).mkdir()
        assert only(tmp_path / name).code == "not_readable"
    assert only(Path("a\0b.csv")).code == "not_readable"
    with pytest.raises(RegisterError, match=r"no\.csv: 1 fault; the first: there is no such file"):
        read_register(tmp_path / "no.csv")


def test_a_wrong_sheet_is_a_fault_that_lists_the_sheets(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    path = helpers.write_xlsx(tmp_path / "r.xlsx", rows, sheets=("Sites 2027", "old", "notes"))
    for wrong in ("Sites 2026", "sites 2027", "new"):
        finding = only(path, sheet=wrong)
        assert (finding.code, finding.value) == ("wrong_sheet", wrong)
        assert all(name in finding.message for name in ("Sites 2027", "old", "notes"))
    assert only(path).code == "sheet_assumed"
    assert only(path, sheet="old").code == "empty_file"
    assert read_register(path, sheet="Sites 2027")[1] == ()


def test_cells_of_a_workbook(tmp_path: Path) -> None:
    book = openpyxl.Workbook()
    sheet = book.active
    assert sheet is not None
    sheet.append([None, None])
    sheet.append(["site_id", "lat", "lon", "work_min", "due", "asset"])
    sheet.append([7, 1.5, "2.25", 20, "2027-03-04", 12.0])
    sheet["A3"].number_format = "00000"
    sheet.append([8, 1.5, 2.26, None, None, True])
    path = tmp_path / "r.xlsx"
    book.save(path)
    register, findings = read_register(path, default_work_s=60.0)
    assert findings == ()
    assert [site.site_id for site in register.sites] == ["00007", "8"]
    assert [site.row for site in register.sites] == [3, 4]
    assert [site.extra["asset"] for site in register.sites] == ["12", "true"]
    assert [visit.work_s for visit in register.visits] == [1200.0, 60.0]
    assert str(register.visits[0].due) == "2027-03-04"


def test_formulas_never_computed_and_error_cells_are_faults(tmp_path: Path) -> None:
    path = helpers.write_xlsx(tmp_path / "r.xlsx", helpers.plain_rows(helpers.seeded(1)))
    book = openpyxl.load_workbook(path)
    sheet = book["sites"]
    planted = {"C3": "lat", "E4": "work_min", "H5": "due_date", "A6": "site_id", "L7": "must"}
    for place in planted:
        sheet[place] = "=1+1"
    for place in ("D8", "F9", "B10"):
        sheet[place] = "#N/A"
    book.save(path)
    found = check_register(path)
    assert [(f.row, f.column, f.code) for f in found] == [
        *((int(p[1:]), c, "formula_without_value") for p, c in planted.items()),
        (8, "lon", "error_cell"),
        (9, "access_min", "error_cell"),
        (10, "name", "error_cell"),
    ]
    assert found[0].value == "=1+1"


def test_a_layer_is_chosen_and_a_wrong_one_refused(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    path = helpers.write_gpkg(tmp_path / "r.gpkg", rows)
    frame = geopandas.GeoDataFrame({"a": [1]}, geometry=[shapely.Point(1, 2)], crs="EPSG:4326")
    frame.to_file(path, layer="other", driver="GPKG")
    assert only(path).code == "layer_assumed"
    assert len(read_register(path, layer="sites")[0].sites) == 40
    for wrong in ("site", "Sites", "x"):
        finding = only(path, layer=wrong)
        assert finding.code == "wrong_layer"
        assert "`sites`, `other`" in finding.message


def test_shapes_that_are_no_points_are_faults_with_their_row(tmp_path: Path) -> None:
    shapes = [
        shapely.Point(1, 2),
        shapely.LineString([(1, 2), (3, 4)]),
        shapely.MultiPoint([(1, 2.01)]),  # a collection of one is a point
        shapely.box(0, 0, 1, 1),
        shapely.MultiPoint([(1, 2), (3, 4)]),
        None,
        shapely.Point(1, 2, 50),  # heights are left out
    ]
    frame = geopandas.GeoDataFrame({"site_id": list("abcdefg")}, geometry=shapes, crs="EPSG:4326")
    path = tmp_path / "r.geojson"
    frame.to_file(path, driver="GeoJSON")
    found = [f for f in check_register(path) if f.is_fault]
    assert [(f.row, f.subject, f.code) for f in found] == [
        (2, "b", "not_a_point"),
        (4, "d", "not_a_point"),
        (5, "e", "not_a_point"),
        (6, "f", "missing_coordinate"),
    ]


def test_other_vector_formats_are_read(tmp_path: Path) -> None:
    rows = [
        {c: r[c] for c in ("site_id", "lat", "lon")} for r in helpers.plain_rows(helpers.seeded(1))
    ]
    points = [shapely.Point(float(row["lon"]), float(row["lat"])) for row in rows]
    frame = geopandas.GeoDataFrame(
        {"site_id": [row["site_id"] for row in rows]}, geometry=points, crs="EPSG:4326"
    )
    for name, driver in (("r.shp", "ESRI Shapefile"), ("r.fgb", "FlatGeobuf"), ("r.gml", "GML")):
        frame.to_file(tmp_path / name, driver=driver)
        register, _ = read_register(tmp_path / name)
        assert {site.site_id for site in register.sites} == {row["site_id"] for row in rows}
        assert len(register.sha256) == 64


def test_settings_that_do_not_apply_are_told(tmp_path: Path) -> None:
    path = helpers.write_csv(tmp_path / "r.csv", helpers.plain_rows(helpers.seeded(1)))
    findings = check_register(path, sheet="a", layer="b")
    assert [(f.code, f.column) for f in findings] == [
        ("setting_not_used", "sheet"),
        ("setting_not_used", "layer"),
    ]
