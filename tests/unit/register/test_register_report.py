"""The report of findings, read back by other libraries."""

from __future__ import annotations

import csv
import json
from pathlib import Path

import pandas as pd
import pytest

from georoute.domain.findings import Finding, Severity
from georoute.errors import OutputError
from georoute.register import write_findings

FINDINGS = (
    Finding(
        severity=Severity.FAULT,
        code="missing_id",
        message='a "quoted", message\nof two lines',
        remedy="say ñandú",
        file="r.csv",
        row=3,
        column="site_id",
        value="=HYPERLINK(1)",
    ),
    Finding(severity=Severity.NOTE, code="no_rows", message="m", value="-1", subject="@x"),
    Finding(severity=Severity.WARNING, code="no_rows", message="+m", value="\t=1", subject="a=b"),
)


def test_csv_has_a_row_per_finding(tmp_path: Path) -> None:
    path = tmp_path / "new" / "f.csv"
    write_findings(FINDINGS, path)
    with path.open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream, strict=True))
    assert [row["severity"] for row in rows] == ["fault", "note", "warning"]
    assert [row["row"] for row in rows] == ["3", "", ""]
    assert rows[0]["message"] == FINDINGS[0].message
    assert pd.read_csv(path)["remedy"][0] == "say ñandú"


def test_csv_cells_are_never_formulas(tmp_path: Path) -> None:
    path = tmp_path / "f.csv"
    write_findings(FINDINGS, path)
    with path.open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert [row["value"] for row in rows] == ["'=HYPERLINK(1)", "'-1", "'\t=1"]
    assert [row["subject"] for row in rows] == ["", "'@x", "a=b"]
    assert rows[2]["message"] == "'+m"


def test_json_keeps_values_unchanged(tmp_path: Path) -> None:
    path = tmp_path / "f.JSON"
    write_findings(FINDINGS, path)
    rows = json.loads(path.read_text(encoding="utf-8"))
    assert [Finding(**{**row, "severity": Severity(row["severity"])}) for row in rows] == list(
        FINDINGS
    )


def test_no_findings_make_a_report_as_well(tmp_path: Path) -> None:
    write_findings((), tmp_path / "f.csv")
    write_findings((), tmp_path / "f.json")
    assert (tmp_path / "f.csv").read_text(encoding="utf-8").startswith("severity,file,row,")
    assert json.loads((tmp_path / "f.json").read_text(encoding="utf-8")) == []


def test_a_report_that_cannot_be_written(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match=r"\.csv or \.json"):
        write_findings(FINDINGS, tmp_path / "f.txt")
    (tmp_path / "f.csv").mkdir()
    with pytest.raises(OutputError):
        write_findings(FINDINGS, tmp_path / "f.csv")
