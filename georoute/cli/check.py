"""``georoute check``: a register, a programme, or a finished plan."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from georoute.cli.exit_codes import ExitCode
from georoute.cli.render import count_findings, print_findings, print_json, stderr

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding

__all__ = ["check", "findings_json"]


def findings_json(findings: Sequence[Finding]) -> list[dict[str, object]]:
    """Return findings as plain values."""
    return [
        {
            "severity": finding.severity.value,
            "code": finding.code,
            "file": finding.file,
            "row": finding.row,
            "column": finding.column,
            "value": finding.value,
            "message": finding.message,
            "remedy": finding.remedy,
            "subject": finding.subject,
        }
        for finding in findings
    ]


def _check_plan(path: Path) -> tuple[Finding, ...]:
    from georoute.audit import audit
    from georoute.store import check_derived, read_plan

    return (*audit(read_plan(path)), *check_derived(path))


def _check_programme(path: Path) -> tuple[Finding, ...]:
    """Check the programme, its register, and its travel table where it has one."""
    from georoute.errors import InputError
    from georoute.pipeline import prepare
    from georoute.register import (
        check_programme,
        check_register,
        read_programme,
        read_register,
    )

    findings = check_programme(path)
    if any(finding.is_fault for finding in findings):
        return findings
    programme = read_programme(path)
    source = Path(programme.register.path)
    findings += check_register(source, programme=programme)
    if any(finding.is_fault for finding in findings):
        return findings
    register, _ = read_register(source, programme=programme)
    try:
        prepared = prepare(programme, register)
    except InputError as error:
        if not error.findings:
            raise
        return (*findings, *error.findings)
    return (*findings, *prepared.findings)


def _columns(pairs: Sequence[str]) -> dict[str, str]:
    columns = {}
    for pair in pairs:
        name, separator, header = pair.partition("=")
        if not separator or not name or not header:
            msg = f"--column takes NAME=HEADER, such as site_id=Number; got {pair!r}"
            raise typer.BadParameter(msg)
        columns[name] = header
    return columns


def check(
    file: Annotated[Path, typer.Argument(help="A programme (.toml), a plan file, or a register.")],
    *,
    sheet: Annotated[str | None, typer.Option(help="Sheet of an .xlsx register.")] = None,
    layer: Annotated[str | None, typer.Option(help="Layer of a GeoPackage register.")] = None,
    crs: Annotated[
        str | None, typer.Option(help="Reference system of x and y columns, such as EPSG:32719.")
    ] = None,
    column: Annotated[
        list[str] | None,
        typer.Option(
            metavar="NAME=HEADER", help="Which header of the file holds a column; repeatable."
        ),
    ] = None,
    report: Annotated[
        Path | None, typer.Option(help="Also write the findings to this .csv or .json file.")
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="Print the findings as JSON.")] = False,
) -> None:
    """Check a register, a programme or a plan.

    A programme is checked with its register. All faults are told at once, each with its row,
    column, value and remedy. For a plan the audit recomputes every clock time, limit and cost
    from the inputs.
    """
    from georoute.register import check_register, write_findings
    from georoute.store import is_plan_file

    is_plan = is_plan_file(file)
    if is_plan:
        findings = _check_plan(file)
    elif file.suffix.lower() == ".toml":
        findings = _check_programme(file)
    else:
        findings = check_register(
            file, columns=_columns(column or ()), sheet=sheet, layer=layer, crs=crs
        )
    if report is not None:
        write_findings(findings, report)
    if json:
        print_json(findings_json(findings))
    else:
        print_findings(findings)
    stderr().print(f"{file}: {count_findings(findings)}.")
    if any(finding.is_fault for finding in findings):
        raise typer.Exit(ExitCode.PLAN_FAULTS if is_plan else ExitCode.INPUT_FAULTS)
