"""The breaches an audit finds, and the tolerances it allows.

Planning rounds once to milliseconds, millimetres and millionths of the currency; the tolerances
cover that rounding and the accuracy of the fast geodesic, and nothing else.
"""

from __future__ import annotations

from datetime import UTC, datetime

from georoute.domain.findings import Finding, Severity

__all__ = [
    "LENGTH_M",
    "MONEY",
    "RELATIVE",
    "TIME_S",
    "Report",
    "close",
    "gap_s",
    "shown",
]

TIME_S = 0.005
"""Seconds that two times may differ."""

LENGTH_M = 0.005
"""Metres that two lengths may differ, beside ``RELATIVE``."""

RELATIVE = 3e-6
"""Share by which a leg measured again may differ, beside ``TIME_S`` and ``LENGTH_M``."""

MONEY = 0.001
"""Units of the currency that two sums of money may differ."""

REMEDY = "Do not use this plan; run `plan` again, and report the fault if it comes back."


def close(expected: float, got: float, tolerance: float) -> bool:
    """Tell whether two figures agree; what is no number agrees with nothing."""
    return abs(expected - got) <= tolerance


def gap_s(start: datetime, end: datetime) -> float:
    """Return the seconds from one instant to the other, right across a change of clocks."""
    return (end.astimezone(UTC) - start.astimezone(UTC)).total_seconds()


def shown(value: object) -> str:
    """Return a value as it is told in a message."""
    if isinstance(value, datetime):
        return value.isoformat(timespec="milliseconds")
    if isinstance(value, float):
        return f"{value:.6f}".rstrip("0").rstrip(".")
    return str(value)


class Report:
    """Collects findings; every one names its subject, what was expected and what was got."""

    def __init__(self) -> None:
        self._findings: list[Finding] = []

    @property
    def findings(self) -> tuple[Finding, ...]:
        """Everything found so far, in order."""
        return tuple(self._findings)

    def fault(self, code: str, where: str, *, expected: object, got: object, subject: str) -> None:
        """Add a breach: ``where`` is a tour, a stop, a leg, a visit or a total."""
        self._findings.append(
            Finding(
                severity=Severity.FAULT,
                code=code,
                message=f"{where}: expected {shown(expected)}, got {shown(got)}.",
                remedy=REMEDY,
                value=shown(got),
                subject=subject,
            )
        )

    def warning(self, code: str, message: str, *, remedy: str, file: str = "") -> None:
        """Add what could not be checked."""
        self._findings.append(
            Finding(severity=Severity.WARNING, code=code, message=message, remedy=remedy, file=file)
        )

    def figure(
        self,
        code: str,
        where: str,
        *,
        expected: float,
        got: float,
        tolerance: float,
        subject: str,
    ) -> None:
        """Add a breach unless two figures agree."""
        if not close(expected, got, tolerance):
            self.fault(code, where, expected=expected, got=got, subject=subject)

    def instant(
        self, code: str, where: str, *, expected: datetime, got: datetime, subject: str
    ) -> None:
        """Add a breach unless two instants agree."""
        if not close(0.0, gap_s(expected, got), TIME_S):
            self.fault(code, where, expected=expected, got=got, subject=subject)
