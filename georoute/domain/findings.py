"""A finding: one thing that is wrong, or worth a look, with its place and its remedy."""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum

__all__ = ["Finding", "Severity"]


class Severity(StrEnum):
    """A fault stops the run; a warning does not; a note tells what was assumed."""

    FAULT = "fault"
    WARNING = "warning"
    NOTE = "note"


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """One fault, warning or note about an input or a plan.

    ``row`` is the row a person sees in the file (the header of a table is row 1); ``None``
    where the finding is about the file as a whole. ``code`` is a stable snake_case word.
    """

    severity: Severity
    code: str
    message: str
    remedy: str = ""
    file: str = ""
    row: int | None = None
    column: str = ""
    value: str = ""
    subject: str = ""

    @property
    def is_fault(self) -> bool:
        """Whether this finding stops the run."""
        return self.severity is Severity.FAULT
