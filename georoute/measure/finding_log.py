"""Collect findings about a table, all of one kind up to a limit that a person can read."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

from georoute.domain.findings import Finding, Severity

if TYPE_CHECKING:
    from georoute.domain.costs import Places

__all__ = ["FindingLog", "pair_name", "plain"]

_LIMITS = {Severity.FAULT: 1000, Severity.WARNING: 50, Severity.NOTE: 50}


class FindingLog:
    """Findings in the order they were made; what goes beyond the limit of its code is counted."""

    def __init__(self) -> None:
        self._kept: list[Finding] = []
        self._seen: Counter[tuple[Severity, str]] = Counter()
        self._unlisted: Counter[tuple[Severity, str]] = Counter()

    def add(self, finding: Finding) -> None:
        """Keep ``finding``, or only count it where its code has reached the limit."""
        key = (finding.severity, finding.code)
        if self.room(*key):
            self._kept.append(finding)
            self._seen[key] += 1
        else:
            self._unlisted[key] += 1

    def room(self, severity: Severity, code: str) -> int:
        """Return how many more findings of this kind would be kept."""
        return _LIMITS[severity] - self._seen[severity, code]

    def count_only(self, severity: Severity, code: str, number: int) -> None:
        """Count ``number`` more findings of a kind without making them."""
        self._unlisted[severity, code] += number

    @property
    def fault_count(self) -> int:
        """Number of faults, also those beyond the limit."""
        every = self._seen + self._unlisted
        return sum(n for (severity, _), n in every.items() if severity is Severity.FAULT)

    def findings(self) -> tuple[Finding, ...]:
        """Return the findings, with one line for each kind that went beyond its limit."""
        rest = [
            Finding(
                severity=severity,
                code=code,
                message=f"{unlisted:,} more of this kind are not listed.",
                remedy="Correct those listed and check again.",
            )
            for (severity, code), unlisted in self._unlisted.items()
            if unlisted
        ]
        return (*self._kept, *rest)


def pair_name(places: Places, i: int, j: int) -> str:
    """Return how a message names the way from place ``i`` to place ``j``."""
    return f"{places.ids[i]} → {places.ids[j]}"


def plain(number: float) -> str:
    """Return a figure as a person would type it into the table."""
    return f"{number:.12g}"
