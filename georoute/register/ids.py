"""Compare the ids of all rows with each other and with those of the bases."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.domain.sites import visit_id_of
from georoute.register.codes import Code, new_finding

if TYPE_CHECKING:
    from collections.abc import Sequence

    from georoute.domain.findings import Finding
    from georoute.register.rows import ParsedRow

__all__ = ["compare_ids"]


class _Ids:
    """The ids seen so far, with the row each stood in first."""

    def __init__(self, base_ids: frozenset[str]) -> None:
        self.base_ids = base_ids
        self.exact: dict[str, int] = {}
        self.alike: dict[str, int] = {}
        self.visits: dict[str, int] = {}

    def judge(self, row: ParsedRow) -> tuple[Code, str, str] | None:
        """Return what is wrong with the id of a row, given the rows before it."""
        site_id, visit_id = row.site_id, visit_id_of(row.site_id, row.task)
        if site_id in self.exact:
            return (
                Code.DUPLICATE_ID,
                f"the id already stands in row {self.exact[site_id]}",
                "give each row an id of its own; for two tasks at one site, put the task behind it",
            )
        if visit_id in self.visits:
            return (
                Code.DUPLICATE_VISIT,
                f"id and task read like those of row {self.visits[visit_id]}: `{visit_id}`",
                "write another sign than `|` in the id or in the task",
            )
        if site_id in self.base_ids:
            return (
                Code.ID_OF_A_BASE,
                "a base of the programme has the same id",
                "rename the base in the programme file, or the site",
            )
        other = self.alike.get(_key(site_id))
        if other is not None:
            return (
                Code.SIMILAR_ID,
                f"the id differs from that of row {other} in capitals or blanks only",
                "delete one of the rows if both are the same site",
            )
        return None

    def remember(self, row: ParsedRow) -> None:
        self.exact.setdefault(row.site_id, row.number)
        self.alike.setdefault(_key(row.site_id), row.number)
        self.visits.setdefault(visit_id_of(row.site_id, row.task), row.number)


def _key(site_id: str) -> str:
    return "".join(site_id.split()).casefold()


def compare_ids(
    rows: Sequence[ParsedRow], *, column: str, base_ids: frozenset[str]
) -> list[Finding]:
    """Return what is wrong with the ids of rows when seen together.

    Parameters
    ----------
    rows
        All rows; those without an id are passed over.
    column
        Header of the id column, for findings.
    base_ids
        Ids of the programme's bases, which share one list of places with the sites.

    Returns
    -------
    list of Finding
        At most one finding per row.
    """
    ids = _Ids(base_ids)
    findings: list[Finding] = []
    for row in rows:
        if not row.site_id:
            continue
        verdict = ids.judge(row)
        ids.remember(row)
        if verdict is not None:
            code, message, remedy = verdict
            findings.append(
                new_finding(
                    code,
                    message,
                    remedy,
                    row=row.number,
                    column=column,
                    value=row.site_id,
                    subject=row.site_id,
                )
            )
    return findings
