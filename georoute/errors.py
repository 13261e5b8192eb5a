"""Every error georoute raises on purpose, in one tree.

::

    GeorouteError
    ├── InputError          what the user handed in cannot be used
    │   ├── RegisterError   the register has faults (``findings`` lists them all)
    │   ├── ProgrammeError  programme.toml has faults (``findings`` lists them all)
    │   ├── RoadError       a source of roads cannot be used (``findings`` where there are several)
    │   └── TableError      the user's own travel table has faults (``findings``)
    ├── PlanError           a plan is not what it claims to be
    │   ├── AuditError      the finished plan failed its own check (``findings``)
    │   └── PlanFileError   a plan file cannot be read, or is of a newer schema
    └── OutputError         a result could not be written; the previous one is untouched

Messages say what was expected, what was got, and what to do.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding

__all__ = [
    "AuditError",
    "GeorouteError",
    "InputError",
    "OutputError",
    "PlanError",
    "PlanFileError",
    "ProgrammeError",
    "RegisterError",
    "RoadError",
    "TableError",
]


class GeorouteError(Exception):
    """Base of all errors that georoute raises on purpose."""

    def __init__(self, message: str, *, findings: Sequence[Finding] = ()) -> None:
        super().__init__(message)
        self.findings: tuple[Finding, ...] = tuple(findings)


class InputError(GeorouteError):
    """What the user handed in cannot be used."""


class RegisterError(InputError):
    """The register has faults; ``findings`` lists all of them."""


class ProgrammeError(InputError):
    """The programme file has faults; ``findings`` lists all of them."""


class RoadError(InputError):
    """A source of roads cannot be used: damaged, the wrong file, elsewhere, or without roads."""


class TableError(InputError):
    """The user's own travel table has faults; ``findings`` lists all of them."""


class PlanError(GeorouteError):
    """A plan is not what it claims to be."""


class AuditError(PlanError):
    """A finished plan failed the audit; ``findings`` lists every breach."""


class PlanFileError(PlanError):
    """A plan file cannot be read, is damaged, or has a newer schema."""


class OutputError(GeorouteError):
    """A result could not be written; the previous file is untouched."""
