"""Clean registers give no fault, every format gives the same register, odd bytes never crash."""

from __future__ import annotations

import zipfile
from dataclasses import replace
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from georoute.domain.findings import Severity
from georoute.domain.sites import Register
from georoute.errors import GeorouteError
from georoute.register import Code, check_register, read_register
from tests import register_helpers as helpers

SHARES_A_FOLDER = settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
ASSUMPTIONS = {Code.SEPARATOR_ASSUMED, Code.DECIMAL_COMMA_ASSUMED, Code.ENCODING_ASSUMED}


def neutral(register: Register) -> Register:
    """Leave out what a format cannot carry: where the file is, its hash, its row numbers."""
    sites = tuple(replace(site, row=None) for site in register.sites)
    return replace(register, sites=sites, source="", sha256="")


@pytest.mark.parametrize("block", range(10))
def test_clean_registers_give_no_fault(block: int, tmp_path: Path) -> None:
    """500 registers in all, in every way of writing text."""
    path = tmp_path / "r.csv"
    for seed in range(50 * block, 50 * block + 50):
        rng = helpers.seeded(seed)
        rows = helpers.clean_rows(rng, rng.randrange(1, 60))
        separator = rng.choice(",;\t")
        path.write_bytes(
            helpers.csv_bytes(
                rows,
                separator=separator,
                decimal_comma=separator != "," and rng.random() < 0.5,
                encoding=rng.choice(("utf-8", "utf-8-sig", "utf-16")),
            )
        )
        register, findings = read_register(path)
        notes = {f.code for f in findings if f.severity is Severity.NOTE}
        assert notes <= ASSUMPTIONS, seed
        assert [site.site_id for site in register.sites] == [row["site_id"] for row in rows]
        assert [site.lat_deg for site in register.sites] == [float(row["lat"]) for row in rows]
        assert [site.lon_deg for site in register.sites] == [float(row["lon"]) for row in rows]
        for site, row in zip(register.sites, rows, strict=True):
            unknown = [column for column in row if column in ("Baujahr", "Straßen-Nr")]
            assert list(site.extra.items()) == [(column, row[column]) for column in unknown]


@pytest.mark.parametrize("seed", range(8))
def test_every_format_gives_the_same_register(seed: int, tmp_path: Path) -> None:
    rng = helpers.seeded(seed)
    rows = helpers.clean_rows(rng, 30)
    made = {
        suffix: write(tmp_path / f"r{suffix}", rows)
        for suffix, write in {
            ".csv": helpers.write_csv,
            ".xlsx": helpers.write_xlsx,
            ".geojson": helpers.write_geojson,
            ".gpkg": helpers.write_gpkg,
        }.items()
    }
    registers = {suffix: neutral(read_register(path)[0]) for suffix, path in made.items()}
    for suffix, register in registers.items():
        assert register == registers[".csv"], suffix


@SHARES_A_FOLDER
@given(
    data=st.binary(max_size=300),
    suffix=st.sampled_from([".csv", ".txt", ".xlsx", ".geojson", ".gpkg", ".shp", ".kml", ".odd"]),
)
def test_random_bytes_never_crash(data: bytes, suffix: str, tmp_path_factory: object) -> None:
    folder = Path(str(tmp_path_factory.mktemp("r")))  # type: ignore[attr-defined] # a fixture
    path = folder / f"r{suffix}"
    path.write_bytes(data)
    findings = check_register(path)
    if any(finding.is_fault for finding in findings):
        with pytest.raises(GeorouteError) as caught:
            read_register(path)
        assert caught.value.findings == findings
    assert all(finding.remedy for finding in findings)


cells = st.one_of(
    st.sampled_from(["", " ", "0", "1,5", "-29.9", "NaN", "2027-03-01", "yes", '"', "=1", "1e999"]),
    st.text(max_size=8),
    st.floats().map(repr),
    st.dates().map(str),
)
header_words = st.sampled_from(
    ["site_id", "lat", "lon", "x", "y", "work_min", "due", "latest", "must", "inspector", "a", ""]
)


@SHARES_A_FOLDER
@given(
    headers=st.lists(header_words, min_size=1, max_size=8),
    rows=st.lists(st.lists(cells, max_size=9), max_size=8),
    separator=st.sampled_from(",;\t"),
    columns=st.dictionaries(header_words, header_words, max_size=2),
    crs=st.none() | st.sampled_from(["EPSG:32719", "EPSG:4326", "nonsense", "EPSG:5703"]),
)
def test_random_tables_never_crash(
    headers: list[str],
    rows: list[list[str]],
    separator: str,
    columns: dict[str, str],
    crs: str | None,
    tmp_path: Path,
) -> None:
    path = tmp_path / "r.csv"
    lines = [separator.join(row) for row in [headers, *rows]]
    path.write_text("\n".join(lines), encoding="utf-8", errors="replace")
    findings = check_register(path, columns=columns, crs=crs)
    if any(finding.is_fault for finding in findings):
        with pytest.raises(GeorouteError):
            read_register(path, columns=columns, crs=crs)
    else:
        register, _ = read_register(path, columns=columns, crs=crs)
        assert len(register.sites) == len(register.visits) > 0


def spoiled(data: st.DataObject, content: bytes) -> bytes:
    """Overwrite some bytes, and sometimes cut the end off."""
    changed = bytearray(content)
    for _ in range(data.draw(st.integers(1, 20))):
        changed[data.draw(st.integers(0, len(changed) - 1))] = data.draw(st.integers(0, 255))
    cut = data.draw(st.booleans())
    return bytes(changed[: data.draw(st.integers(0, len(changed)))] if cut else changed)


@SHARES_A_FOLDER
@given(data=st.data(), suffix=st.sampled_from([".xlsx", ".gpkg", ".geojson", ".csv"]))
def test_damaged_files_never_crash(data: st.DataObject, suffix: str, tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1), 5)
    write = {
        ".csv": helpers.write_csv,
        ".xlsx": helpers.write_xlsx,
        ".geojson": helpers.write_geojson,
        ".gpkg": helpers.write_gpkg,
    }[suffix]
    whole = tmp_path / f"whole{suffix}"
    path = tmp_path / f"r{suffix}"
    if not whole.exists():
        write(whole, rows)
    path.write_bytes(spoiled(data, whole.read_bytes()))
    assert all(finding.remedy for finding in check_register(path))


@SHARES_A_FOLDER
@given(
    data=st.data(),
    part=st.sampled_from(
        ["xl/worksheets/sheet1.xml", "xl/workbook.xml", "xl/sharedStrings.xml", "xl/styles.xml"]
    ),
)
def test_workbooks_damaged_inside_never_crash(
    data: st.DataObject, part: str, tmp_path: Path
) -> None:
    """The archive is whole and one of its parts is spoiled: a checksum does not help here."""
    whole = helpers.write_xlsx(tmp_path / "w.xlsx", helpers.plain_rows(helpers.seeded(1), 5))
    path = tmp_path / "r.xlsx"
    with zipfile.ZipFile(whole) as source, zipfile.ZipFile(path, "w") as target:
        for name in source.namelist():
            content = source.read(name)
            target.writestr(name, spoiled(data, content) if name == part else content)
    assert all(finding.remedy for finding in check_register(path))
