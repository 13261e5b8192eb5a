"""Every fault planted in a register is found, with its row, column and a remedy; none invented."""

from __future__ import annotations

from pathlib import Path

import pytest

from georoute.domain.findings import Finding, Severity
from georoute.errors import RegisterError
from georoute.register import CODE_MEANINGS, Code, check_register, read_register
from tests import register_helpers as helpers


def places(findings: tuple[Finding, ...]) -> set[tuple[int | None, str, str]]:
    return {(f.row, f.column, f.code) for f in findings if f.severity is not Severity.NOTE}


@pytest.mark.parametrize("kind", helpers.ROW_FAULTS)
@pytest.mark.parametrize("seed", [1, 2, 3])
def test_planted_faults_are_found_and_nothing_else(kind: str, seed: int, tmp_path: Path) -> None:
    rng = helpers.seeded(f"{kind}{seed}")
    rows = helpers.plain_rows(rng)
    planted = helpers.plant(kind, rows, rng)
    findings = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert len(planted) >= 3
    assert places(findings) == {(p.row, p.column, p.code) for p in planted}
    assert all(f.remedy and f.message and f.file.endswith("r.csv") for f in findings)
    severity = CODE_MEANINGS[Code(planted[0].code)][0]
    assert all(f.severity is severity for f in findings)


def test_forty_bad_rows_make_one_report_of_forty_findings(tmp_path: Path) -> None:
    rng = helpers.seeded(40)
    rows = helpers.plain_rows(rng, 60)
    for k in range(40):
        rows[k]["work_min"] = "soon"
    path = helpers.write_csv(tmp_path / "r.csv", rows)
    with pytest.raises(RegisterError, match="40 faults") as caught:
        read_register(path)
    assert [f.row for f in caught.value.findings] == list(range(2, 42))


def test_faults_of_several_kinds_are_reported_together_and_in_order(tmp_path: Path) -> None:
    rng = helpers.seeded(5)
    rows = helpers.plain_rows(rng)
    kinds = ("missing id", "zero", "ambiguous date", "negative load", "swapped axes")
    planted = []
    for n, kind in enumerate(kinds):  # each kind has rows of its own
        code, column, edits = helpers.ROW_FAULTS[kind]
        for j, edit in enumerate(edits[:3]):
            edit(rows[3 * n + j])
            planted.append((3 * n + j + 2, column, code))
    findings = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert [(f.row, f.column, f.code) for f in findings] == planted


def test_duplicate_ids_are_found_in_the_second_row(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    for k in (10, 20, 30):
        rows[k]["site_id"] = rows[k - 5]["site_id"]
    findings = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert places(findings) == {(k + 2, "site_id", "duplicate_id") for k in (10, 20, 30)}
    assert [f"row {k - 3}" in f.message for k, f in zip((10, 20, 30), findings, strict=True)]


def test_ids_that_differ_in_capitals_or_blanks_are_a_warning(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    rows[10]["site_id"], rows[20]["site_id"], rows[30]["site_id"] = "s000", "S 001", "s0 02"
    findings = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert places(findings) == {(k, "site_id", "similar_id") for k in (12, 22, 32)}


def test_visits_that_would_have_one_name_are_refused(tmp_path: Path) -> None:
    rows = [{**row, "task": "look"} for row in helpers.plain_rows(helpers.seeded(1))]
    for k, (first, second) in enumerate([("a|b", "a"), ("c|d", "c"), ("|", "")]):
        rows[2 * k] |= {"site_id": first or "-", "task": "look"}
        rows[2 * k + 1] |= {"site_id": second or "x", "task": f"{first[2:]}|look"}
    rows[4] |= {"site_id": "x|y"}
    rows[5] |= {"site_id": "x", "task": "y|look"}
    findings = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert places(findings) == {(k, "site_id", "duplicate_visit") for k in (3, 5, 7)}


def test_the_same_place_twice_is_a_warning(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(1))
    for k in (10, 20, 30):
        rows[k] |= {"lat": rows[0]["lat"], "lon": rows[0]["lon"] + "0"}
    register, findings = read_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert places(findings) == {(k + 2, "lat, lon", "same_place") for k in (10, 20, 30)}
    assert len(register.sites) == len(rows)


@pytest.mark.parametrize("share", [0.15, 0.3, 0.45])
def test_swapped_rows_are_told_from_good_ones_up_to_nearly_half(
    share: float, tmp_path: Path
) -> None:
    rows = helpers.plain_rows(helpers.seeded(3), 100)
    for row in rows[: int(100 * share)]:
        helpers.swap(row)
    findings = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert places(findings) == {
        (k + 2, "lat, lon", "swapped_axes") for k in range(int(100 * share))
    }


def test_a_second_area_is_one_warning_not_a_list_of_outliers(tmp_path: Path) -> None:
    rows = helpers.plain_rows(helpers.seeded(3), 100)
    for row in rows[:20]:
        row["lat"] = f"{float(row['lat']) - 3:.6f}"
    (finding,) = check_register(helpers.write_csv(tmp_path / "r.csv", rows))
    assert finding.code == "far_outlier"
    assert finding.row is None
    assert "20 of 100" in finding.message


@pytest.mark.parametrize(
    ("line", "count"), [("S1,2", 2), ("S1,2,3,4,5", 5), ("S1", 1), ("S1,2,3,x", 4)]
)
def test_ragged_rows_name_their_cells(line: str, count: int, tmp_path: Path) -> None:
    path = tmp_path / "r.csv"
    path.write_text(f"site_id,lat,lon\nS0,1,2\n{line}\nS2,1,2.1\n", encoding="utf-8")
    (finding,) = check_register(path)
    assert (finding.row, finding.code) == (3, "ragged_row")
    assert f"{count} cells, the headers 3" in finding.message


def test_empty_cells_at_the_end_of_a_row_are_no_fault(tmp_path: Path) -> None:
    path = tmp_path / "r.csv"
    path.write_text("site_id,lat,lon\nS0,1,2,,\n,,\n\nS2,1,2.1,\n", encoding="utf-8")
    register, findings = read_register(path)
    assert findings == ()
    assert [site.row for site in register.sites] == [2, 5]


def test_every_code_says_what_it_means() -> None:
    assert set(CODE_MEANINGS) == set(Code)
    assert all(meaning.endswith((".", "?")) for _, meaning in CODE_MEANINGS.values())
