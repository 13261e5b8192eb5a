"""Find out which column of a file is which: mapping first, then names, then aliases."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.register.codes import Code, nearest, nearest_words, new_finding
from georoute.register.columns import COLUMNS, WITHOUT_EFFECT, ColumnKind, folded
from georoute.register.delimited import KnownHeaders
from georoute.register.tables import is_blank

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from georoute.domain.findings import Finding
    from georoute.register.tables import RawTable

__all__ = ["Layout", "known_headers", "lay_out"]

_SHORT = 3
"""Names of so few letters are not compared with misspelt ones."""

_NUMERIC = frozenset({ColumnKind.COORDINATE, ColumnKind.MINUTES, ColumnKind.NUMBER})


@dataclass(frozen=True, slots=True, kw_only=True)
class Layout:
    """Where each column stands: ``known`` by canonical name, ``extra`` by header in file order.

    ``written`` gives the header as the file writes it, for findings.
    """

    known: Mapping[str, int]
    written: Mapping[str, str]
    extra: tuple[tuple[str, int], ...]
    width: int
    findings: tuple[Finding, ...]


def known_headers(mapping: Mapping[str, str]) -> KnownHeaders:
    """Return the headers that mean something, given the programme's column mapping."""
    names: set[str] = set(WITHOUT_EFFECT)
    numbers: set[str] = set()
    for column in COLUMNS:
        own = {column.name, *column.aliases}
        if column.name in mapping:
            own.add(folded(mapping[column.name]))
        names |= own
        if column.kind in _NUMERIC:
            numbers |= own
    return KnownHeaders(names=frozenset(names), numbers=frozenset(numbers))


class _Finder:
    """Assigns columns step by step; what it finds wrong collects in ``findings``."""

    def __init__(self, table: RawTable, mapping: Mapping[str, str]) -> None:
        self.table = table
        self.headers = table.headers
        self.folded = [folded(header) for header in table.headers]
        self.mapping = mapping
        self.known: dict[str, int] = {}
        self.findings: list[Finding] = []
        self.faulty: set[str] = set()  # columns that are not to be reported as missing again

    def add(self, code: Code, message: str, remedy: str, *, column: str, value: str = "") -> None:
        self.findings.append(
            new_finding(
                code, message, remedy, row=self.table.header_row, column=column, value=value
            )
        )

    def find_duplicates(self) -> None:
        """Refuse headers that stand twice: it is open which of the two is meant."""
        seen: dict[str, int] = {}
        for k, word in enumerate(self.folded):
            if not word:
                continue
            if word in seen:
                self.faulty.add(word)
                self.add(
                    Code.DUPLICATE_HEADER,
                    f"column {k + 1} has the same header as column {seen[word] + 1}",
                    "rename one of the two, or delete it",
                    column=self.headers[k].strip(),
                )
            else:
                seen[word] = k

    def _header_index(self, header: str) -> int | None:
        if header in self.headers:
            return self.headers.index(header)
        word = folded(header)
        return self.folded.index(word) if word and word in self.folded else None

    def assign_mapped(self) -> None:
        """Assign what the programme's mapping says; its faults name the nearest words."""
        names = [column.name for column in COLUMNS]
        for name, header in self.mapping.items():
            if name not in names:
                self.add(
                    Code.UNKNOWN_MAPPING,
                    f"the column mapping names `{name}`, which is no column of a register",
                    f"{nearest_words(name, names)} The mapping is written "
                    "`georoute's name = header of the file`",
                    column=name,
                    value=header,
                )
                continue
            index = self._header_index(header)
            if index is None:
                self.faulty.add(name)
                self.add(
                    Code.MAPPED_HEADER_ABSENT,
                    f"the column mapping takes `{name}` from `{header}`; there is no such header",
                    nearest_words(header, [h.strip() for h in self.headers if h.strip()]),
                    column=name,
                    value=header,
                )
            else:
                self.known[name] = index

    def assign_named(self) -> None:
        """Assign the rest by canonical name, else by alias."""
        for column in COLUMNS:
            if column.name in self.known or column.name in self.faulty:
                continue
            taken = set(self.known.values())
            free = {w: k for k, w in reversed(list(enumerate(self.folded))) if k not in taken}
            hits = [free[word] for word in (column.name, *column.aliases) if word in free]
            if not hits:
                continue
            self.known[column.name] = hits[0]
            exact = self.folded[hits[0]] == column.name
            for k in hits[1:]:
                self._second(column.name, hits[0], k, exact=exact)

    def _second(self, name: str, used: int, other: int, *, exact: bool) -> None:
        first, second = self.headers[used].strip(), self.headers[other].strip()
        if exact:
            self.add(
                Code.SECOND_COLUMN,
                f"`{first}` and `{second}` both mean {name}; `{first}` is used",
                f"rename `{second}` if it means something else, or delete it",
                column=second,
            )
        else:
            self.add(
                Code.DUPLICATE_HEADER,
                f"`{first}` and `{second}` both mean {name}",
                f"rename the right one `{name}`, or name it in [register.columns]",
                column=second,
            )

    def find_missing(self) -> None:
        """Report columns that are needed; coordinates may come from geometries instead."""
        for column in COLUMNS:
            from_geometry = self.table.has_geometry and column.kind is ColumnKind.COORDINATE
            if (
                not column.required
                or from_geometry
                or column.name in self.known
                or column.name in self.faulty
            ):
                continue
            taken = set(self.known.values())
            free = [h.strip() for k, h in enumerate(self.headers) if k not in taken and h.strip()]
            near = nearest(column.name, free)
            hint = " (is it " + " or ".join(f"`{word}`" for word in near) + "?)" if near else ""
            self.add(
                Code.MISSING_COLUMN,
                f"there is no column `{column.name}`{hint}",
                f"add it, or name its header in the programme: "
                f'[register.columns] {column.name} = "…"',
                column=column.name,
            )

    def coordinates_not_used(self) -> None:
        """Say that places come from geometries where the file has columns for them as well."""
        if not self.table.has_geometry:
            return
        for name in ("lat", "lon"):
            if name in self.known:
                header = self.headers[self.known[name]].strip()
                self.add(
                    Code.SETTING_NOT_USED,
                    f"the column `{header}` is not used: places come from the geometries",
                    "nothing to do if the geometries are right",
                    column=header,
                )

    def _values_under(self, index: int) -> bool:
        return any(
            index < len(row.cells) and not is_blank(row.cells[index]) for row in self.table.rows
        )

    def extra_columns(self) -> tuple[tuple[str, int], ...]:
        """Return the columns to carry through, with a look at what they may be."""
        taken = set(self.known.values())
        extra: list[tuple[str, int]] = []
        for k, header in enumerate(self.headers):
            if k in taken:
                continue
            if not header.strip():
                if self._values_under(k):
                    extra.append((f"column_{k + 1}", k))
                    self.add(
                        Code.EMPTY_HEADER,
                        f"column {k + 1} has values and no header",
                        f"give it a header; it is carried through as `column_{k + 1}`",
                        column=f"column_{k + 1}",
                    )
                continue
            extra.append((header.strip(), k))
            self._remark(header.strip(), self.folded[k])
        return tuple(extra)

    def _remark(self, header: str, word: str) -> None:
        if word in WITHOUT_EFFECT:
            self.add(
                Code.COLUMN_WITHOUT_EFFECT,
                f"`{header}` is carried through to the outputs and does not shape the plan",
                "mind it yourself when you read the plan",
                column=header,
            )
            return
        absent = (column.name for column in COLUMNS if column.name not in self.known)
        # Short words resemble each other by chance.
        near = next((name for name in absent if len(name) > _SHORT and _close(word, name)), None)
        if near is not None:
            self.add(
                Code.SIMILAR_COLUMN,
                f"`{header}` is not known and is only carried through; is it `{near}`?",
                f"rename it `{near}` if that is meant",
                column=header,
            )


def _close(word: str, name: str) -> bool:
    """Tell whether two words differ by one letter more, less, other or exchanged."""
    if abs(len(word) - len(name)) > 1 or word == name:
        return False
    k = 0
    while k < min(len(word), len(name)) and word[k] == name[k]:
        k += 1
    rests = (
        (word[k + 1 :], name[k + 1 :]),
        (word[k + 1 :], name[k:]),
        (word[k:], name[k + 1 :]),
    )
    exchanged = word[k : k + 2] == name[k : k + 2][::-1] and word[k + 2 :] == name[k + 2 :]
    return exchanged or any(a == b for a, b in rests)


def lay_out(table: RawTable, *, mapping: Mapping[str, str]) -> Layout:
    """Find the columns of a table.

    Parameters
    ----------
    table
        The table.
    mapping
        Headers of the file by canonical column name.

    Returns
    -------
    Layout
        Columns found, columns to carry through, and all that is wrong with the headers.
    """
    finder = _Finder(table, mapping)
    finder.find_duplicates()
    finder.assign_mapped()
    finder.assign_named()
    finder.find_missing()
    finder.coordinates_not_used()
    extra = finder.extra_columns()
    return Layout(
        known=finder.known,
        written={name: _written(table.headers, k) for name, k in finder.known.items()},
        extra=extra,
        width=len(table.headers),
        findings=tuple(finder.findings),
    )


def _written(headers: Sequence[str], index: int) -> str:
    return headers[index].strip()
