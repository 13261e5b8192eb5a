"""Choose the reader by the name of the file, and hash what is read."""

from __future__ import annotations

import hashlib
from dataclasses import replace
from typing import TYPE_CHECKING

from georoute.register.codes import Code, new_finding
from georoute.register.delimited import read_delimited
from georoute.register.headers import known_headers
from georoute.register.sources import bytes_of
from georoute.register.tables import UnreadableFileError

if TYPE_CHECKING:
    from collections.abc import Mapping
    from pathlib import Path

    from georoute.domain.findings import Finding
    from georoute.register.tables import RawTable

__all__ = ["load_table"]

_DELIMITED = frozenset({".csv", ".tsv", ".txt"})
_WORKBOOK = frozenset({".xlsx", ".xlsm"})
_OLD_WORKBOOK = frozenset({".xls", ".xlsb"})
_SIDE_FILES = (".dbf", ".shx", ".prj", ".cpg")
"""What belongs to a shapefile besides its .shp, in the order it is hashed."""


def load_table(
    path: Path, *, mapping: Mapping[str, str], sheet: str | None, layer: str | None
) -> tuple[RawTable, str]:
    """Read the table of a file; readers are imported where they are used.

    Parameters
    ----------
    path
        The file; its suffix tells the format.
    mapping
        Headers of the file by canonical column name.
    sheet
        Sheet of a workbook, where one is chosen.
    layer
        Layer of a vector file, where one is chosen.

    Returns
    -------
    table : RawTable
        Headers, rows, and what was found while reading.
    digest : str
        SHA-256 of the file's content, in hexadecimal digits.

    Raises
    ------
    UnreadableFileError
        If the file cannot be read at all.
    """
    suffix = path.suffix.casefold()
    data = bytes_of(path)
    digest = hashlib.sha256(data)
    unused = []
    if suffix in _DELIMITED:
        table = read_delimited(data, known=known_headers(mapping))
        unused = [("sheet", sheet), ("layer", layer)]
    elif suffix in _WORKBOOK:
        from georoute.register.workbook import read_workbook  # noqa: PLC0415 - slow to import

        table = read_workbook(data, sheet=sheet)
        unused = [("layer", layer)]
    elif suffix in _OLD_WORKBOOK:
        fault = new_finding(
            Code.UNKNOWN_FORMAT,
            f"`{suffix}` workbooks cannot be read",
            "save it as .xlsx in the spreadsheet program",
        )
        raise UnreadableFileError([fault])
    else:
        from georoute.register.vector import read_vector  # noqa: PLC0415 - slow to import

        table = read_vector(path, layer=layer)
        for side in _SIDE_FILES if suffix == ".shp" else ():
            digest.update(path.with_suffix(side).read_bytes() if _is_side(path, side) else b"")
        unused = [("sheet", sheet)]
    notes = [_not_used(name, value) for name, value in unused if value is not None]
    return replace(table, findings=(*table.findings, *notes)), digest.hexdigest()


def _is_side(path: Path, side: str) -> bool:
    return path.with_suffix(side).is_file()


def _not_used(name: str, value: str) -> Finding:
    return new_finding(
        Code.SETTING_NOT_USED,
        f"the setting `{name}` does not apply to a file of this format",
        "take the setting out",
        column=name,
        value=value,
    )
