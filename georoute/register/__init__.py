"""Read and check the register and the programme file."""

from __future__ import annotations

from georoute.register.codes import CODE_MEANINGS, Code
from georoute.register.columns import COLUMNS, Column, ColumnKind
from georoute.register.programme_fields import ProgrammeField, programme_fields
from georoute.register.programme_file import check_programme, read_programme
from georoute.register.reader import (
    DEFAULT_ACCESS_S,
    DEFAULT_WORK_S,
    check_register,
    read_register,
)
from georoute.register.report import write_findings

__all__ = [
    "CODE_MEANINGS",
    "COLUMNS",
    "DEFAULT_ACCESS_S",
    "DEFAULT_WORK_S",
    "Code",
    "Column",
    "ColumnKind",
    "ProgrammeField",
    "check_programme",
    "check_register",
    "programme_fields",
    "read_programme",
    "read_register",
    "write_findings",
]
