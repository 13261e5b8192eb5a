"""Write findings to a file: CSV for people, JSON for programs."""

from __future__ import annotations

import csv
import io
import json
from dataclasses import fields
from pathlib import Path
from typing import TYPE_CHECKING

from georoute.domain.findings import Finding
from georoute.errors import OutputError
from georoute.files import atomic_write_bytes

if TYPE_CHECKING:
    from collections.abc import Iterable

__all__ = ["FINDING_FIELDS", "write_findings"]

FINDING_FIELDS = (
    "severity",
    "file",
    "row",
    "column",
    "value",
    "code",
    "message",
    "remedy",
    "subject",
)
"""Columns of the report, in the order a person reads them."""

_STARTS_A_FORMULA = ("=", "+", "-", "@")


def write_findings(findings: Iterable[Finding], path: Path | str) -> None:
    """Write findings as CSV (UTF-8, RFC 4180) or JSON, by the suffix of the path.

    In CSV, a cell that a spreadsheet would take for a formula (it begins with ``=``, ``+``,
    ``-`` or ``@``) gets a leading apostrophe. JSON keeps values unchanged.

    Parameters
    ----------
    findings
        What was found.
    path
        The file to write, ``.csv`` or ``.json``; an existing one is replaced in one step.

    Raises
    ------
    OutputError
        If the suffix is another, or the file cannot be written.
    """
    target = Path(path)
    rows = [{name: getattr(finding, name) for name in FINDING_FIELDS} for finding in findings]
    suffix = target.suffix.casefold()
    if suffix == ".csv":
        data = _csv(rows)
    elif suffix == ".json":
        data = json.dumps(rows, ensure_ascii=False, indent=2) + "\n"
    else:
        msg = f"{target}: a report is .csv or .json, got `{target.suffix}`; rename the file"
        raise OutputError(msg)
    atomic_write_bytes(target, data.encode("utf-8", "backslashreplace"))


def _csv(rows: list[dict[str, object]]) -> str:
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer)
    writer.writerow(FINDING_FIELDS)
    for row in rows:
        writer.writerow([_safe(value) for value in row.values()])
    return buffer.getvalue()


def _safe(value: object) -> str:
    """Return the text of a cell that no spreadsheet takes for a formula."""
    text = "" if value is None else str(value)
    # A tab or a carriage return before the sign does not stop a spreadsheet.
    return f"'{text}" if text.lstrip("\t\r\n ").startswith(_STARTS_A_FORMULA) else text


if {field.name for field in fields(Finding)} != set(FINDING_FIELDS):  # pragma: no cover
    msg = "the report and the model of a finding differ"
    raise AssertionError(msg)
