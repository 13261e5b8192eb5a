"""The user's own travel table: read, checked as a whole, and used as given."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from georoute.domain.costs import CostMatrix
from georoute.domain.findings import Finding, Severity
from georoute.errors import TableError
from georoute.measure.cells import open_sheet
from georoute.measure.consistency import check_consistency
from georoute.measure.figure_checks import check_figures
from georoute.measure.finding_log import FindingLog
from georoute.measure.grid import METRES, SECONDS, Grid
from georoute.measure.long_form import LONG_COLUMNS, is_long, read_long
from georoute.measure.square_form import read_square

if TYPE_CHECKING:
    from georoute.domain.costs import Places
    from georoute.measure.grid import Layer

__all__ = ["check_table", "read_table"]


def read_table(path: Path | str, places: Places) -> tuple[CostMatrix, tuple[Finding, ...]]:
    """Return the travel of the user's own table, and its warnings and notes.

    Parameters
    ----------
    path
        A CSV in long form (``from_id, to_id, drive_s, dist_m``); or one of two CSV in square
        form whose names differ only in ``drive_s`` and ``dist_m``; or the folder that holds
        ``drive_s.csv`` and ``dist_m.csv``. Empty or ``inf`` means that there is no way.
    places
        The places the table must cover, by their ids.

    Returns
    -------
    Seconds and metres as given, not estimated, and what is worth a look.

    Raises
    ------
    TableError
        The table has faults; its ``findings`` list all of them, with the warnings.
    """
    grid, log = _read(Path(path), places)
    findings = log.findings()
    if grid is None or log.fault_count:
        first = next(finding for finding in findings if finding.is_fault)
        where = f"{first.file} row {first.row}" if first.row else first.file
        msg = (
            f"The travel table has {log.fault_count:,} "
            f"fault{'s' if log.fault_count > 1 else ''}. {where}: {first.message} {first.remedy}"
        )
        raise TableError(msg, findings=findings)
    files = sorted({grid.seconds.file, grid.metres.file}, reverse=True)
    costs = CostMatrix(
        place_ids=places.ids,
        travel_s=grid.seconds.values,
        length_m=grid.metres.values,
        source=f"own table {' and '.join(files)}",
        estimated=False,
    )
    return costs, findings


def check_table(path: Path | str, places: Places) -> tuple[Finding, ...]:
    """Return everything there is to say about a table, faults included; never raise for them.

    Parameters
    ----------
    path
        As for ``read_table``.
    places
        The places the table must cover, by their ids.

    Returns
    -------
    Faults, warnings and notes.
    """
    _, log = _read(Path(path), places)
    return log.findings()


def _read(path: Path, places: Places) -> tuple[Grid | None, FindingLog]:
    log = FindingLog()
    header = () if path.is_dir() else _header(path)
    grid: Grid | None
    if path.is_dir():
        grid = _read_two(path / f"{SECONDS}.csv", path / f"{METRES}.csv", places, log)
    elif header and not is_long(header):
        grid = _read_siblings(path, places, log)
    else:
        grid = _read_long_file(path, places, log)
    if grid is not None:
        check_figures(grid, log)
        check_consistency(grid, log)
    return grid, log


def _header(path: Path) -> tuple[str, ...]:
    """Return the header of a file; empty where it cannot be had, which is reported later."""
    silent = FindingLog()
    if not _is_there(path, silent):
        return ()
    with path.open(encoding="utf-8-sig", newline="") as stream:
        sheet = open_sheet(stream, path, silent)
        return () if sheet is None else sheet.header


def _read_long_file(path: Path, places: Places, log: FindingLog) -> Grid | None:
    if not _is_there(path, log):
        return None
    with path.open(encoding="utf-8-sig", newline="") as stream:
        sheet = open_sheet(stream, path, log)
        return None if sheet is None else read_long(sheet, places, log)


def _read_siblings(path: Path, places: Places, log: FindingLog) -> Grid | None:
    """Read both files of a square form, given one of them."""
    if SECONDS in path.name:
        return _read_two(path, path.with_name(path.name.replace(SECONDS, METRES)), places, log)
    if METRES in path.name:
        return _read_two(path.with_name(path.name.replace(METRES, SECONDS)), path, places, log)
    log.add(
        Finding(
            severity=Severity.FAULT,
            code="unknown_form",
            message=(
                f"Expected the columns {', '.join(LONG_COLUMNS)}, or the square form under a name "
                f"with {SECONDS} or {METRES} in it, got neither."
            ),
            remedy=f"Name the two square files for example {SECONDS}.csv and {METRES}.csv.",
            file=path.name,
            row=1,
        )
    )
    return None


def _read_two(seconds: Path, metres: Path, places: Places, log: FindingLog) -> Grid | None:
    layers: list[Layer] = []
    for path, name in ((seconds, SECONDS), (metres, METRES)):
        if not _is_there(path, log):
            continue
        with path.open(encoding="utf-8-sig", newline="") as stream:
            sheet = open_sheet(stream, path, log)
            if sheet is not None:
                layers.append(read_square(sheet, places, name, log))
    if len(layers) < len((seconds, metres)):
        return None
    return Grid(places=places, seconds=layers[0], metres=layers[1])


def _is_there(path: Path, log: FindingLog) -> bool:
    if path.is_file():
        return True
    log.add(
        Finding(
            severity=Severity.FAULT,
            code="missing_file",
            message=f"Expected a travel table in {path}, there is no such file.",
            remedy="Correct the path of the table in the programme, or put the file there.",
            file=path.name,
        )
    )
    return False
