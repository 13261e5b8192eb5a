"""What commands print: findings, tables, figures in words.

Results go to standard output, everything about the run to standard error.
"""

from __future__ import annotations

import json
import sys
from typing import TYPE_CHECKING

from rich.console import Console
from rich.table import Table
from rich.text import Text

from georoute.domain.cautions import CAUTION
from georoute.domain.findings import Severity

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding

__all__ = [
    "clock_span",
    "count_findings",
    "counted",
    "hours",
    "kilometres",
    "money",
    "new_table",
    "print_caution",
    "print_error",
    "print_findings",
    "print_json",
    "stderr",
    "stdout",
]


CENTS_BELOW = 10_000
WIDE = 200
"""Columns of a table that goes to a file or a pipe, where nothing needs to be cut."""


def stdout() -> Console:
    """Return a console on standard output; long lines are left to the terminal or the reader."""
    width = None if sys.stdout.isatty() else WIDE
    return Console(highlight=False, markup=False, soft_wrap=True, width=width)


def stderr() -> Console:
    """Return a console on standard error."""
    return Console(stderr=True, highlight=False, markup=False, soft_wrap=True)


def hours(seconds: float) -> str:
    """Write a duration as ``7 h 05 min``, rounded to whole minutes."""
    minutes = round(seconds / 60)
    sign = "-" if minutes < 0 else ""
    whole, rest = divmod(abs(minutes), 60)
    return f"{sign}{whole} h {rest:02d} min"


def clock_span(seconds: float) -> str:
    """Write a duration as ``7:05`` (hours and minutes), for the narrow columns of a table."""
    whole, rest = divmod(round(seconds / 60), 60)
    return f"{whole}:{rest:02d}"


def kilometres(metres: float) -> str:
    """Write a length in kilometres with one decimal."""
    return f"{metres / 1000:.1f} km"


def money(amount: float, currency: str) -> str:
    """Write an amount of money with its ISO 4217 code; cents only where they tell something."""
    return f"{amount:,.{0 if abs(amount) >= CENTS_BELOW else 2}f} {currency}"


def new_table(*columns: str, right: Sequence[str] = ()) -> Table:
    """Return an empty table; the columns named in ``right`` hold figures."""
    table = Table(box=None, pad_edge=False, header_style="bold")
    for column in columns:
        table.add_column(column, justify="right" if column in right else "left", no_wrap=True)
    return table


def _place_of(finding: Finding) -> str:
    place = finding.file
    if finding.row is not None:
        place += f", row {finding.row}"
    if finding.column:
        place += f", column {finding.column}"
    return place


def _lines_of(finding: Finding) -> str:
    shown = f" (value: {finding.value!r})" if finding.value else ""
    lines = f"{finding.severity.value.upper():<8}{_place_of(finding)}: {finding.message}{shown}"
    if finding.remedy:
        lines += f"\n        do: {finding.remedy}"
    return f"{lines}  [{finding.code}]"


def print_findings(findings: Sequence[Finding]) -> None:
    """Print every finding with its place, its value and its remedy."""
    console = stderr()
    styles = {Severity.FAULT: "bold", Severity.WARNING: "", Severity.NOTE: "dim"}
    for finding in findings:
        console.print(Text(_lines_of(finding), style=styles[finding.severity]))


def count_findings(findings: Sequence[Finding]) -> str:
    """Say how many faults, warnings and notes there are."""
    counts = dict.fromkeys(Severity, 0)
    for finding in findings:
        counts[finding.severity] += 1
    return (
        f"{counts[Severity.FAULT]} fault(s), {counts[Severity.WARNING]} warning(s), "
        f"{counts[Severity.NOTE]} note(s)"
    )


def counted(number: int, thing: str) -> str:
    """Say how many of a thing there are: ``1 tour``, ``3 tours``."""
    return f"{number} {thing}" if number == 1 else f"{number} {thing}s"


def print_error(message: str) -> None:
    """Print why a command ended without its result."""
    stderr().print(Text(f"georoute: {message}", style="bold"))


def print_caution() -> None:
    """Print the caution that goes with every plan."""
    stderr().print(Text(f"CAUTION  {CAUTION}", style="bold"))


def print_json(value: object) -> None:
    """Print a value as JSON on standard output."""
    sys.stdout.write(json.dumps(value, ensure_ascii=False, indent=2, allow_nan=False) + "\n")
