"""Objects of the model to rows of a table and back, driven by the fields of their classes."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import MISSING, Field, dataclass, fields, is_dataclass
from functools import cache
from types import NoneType
from typing import TYPE_CHECKING, Any, get_args, get_type_hints

from georoute.store.cells import Codec, codec_for
from georoute.store.schema import TABLES

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

    from georoute.store.schema import Table

__all__ = ["Column", "Row", "build", "columns_of", "flatten"]

Row = Mapping[str, object]
Path = tuple[str, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Column:
    """A column and the field, or field of a field, that it holds."""

    name: str
    path: Path
    codec: Codec


@dataclass(frozen=True, slots=True, kw_only=True)
class _Source:
    """A row and how its columns are found."""

    row: Row
    columns: Mapping[Path, Column]
    zone: ZoneInfo


def _nested(hint: object) -> type | None:
    """Return the class of the model whose fields become columns, where ``hint`` is such a one."""
    args = get_args(hint)
    if args and NoneType not in args:
        return None  # a collection fits into one cell
    for candidate in (hint, *args):
        if isinstance(candidate, type) and is_dataclass(candidate):
            return candidate
    return None


def _walk(kind: type, prefix: Path, omit: frozenset[str]) -> list[Column]:
    hints = get_type_hints(kind)
    found = []
    for item in fields(kind):
        if item.name in omit:
            continue
        path = (*prefix, item.name)
        inner = _nested(hints[item.name])
        if inner is None:
            codec = codec_for(hints[item.name])
            found.append(Column(name="_".join(path), path=path, codec=codec))
        else:
            found.extend(_walk(inner, path, frozenset()))
    return found


@cache
def _columns(name: str) -> tuple[Column, ...]:
    table = TABLES[name]
    return tuple(
        Column(name=table.rename.get(c.name, c.name), path=c.path, codec=c.codec)
        for c in _walk(table.kind, (), table.omit)
    )


def columns_of(table: Table) -> tuple[Column, ...]:
    """Return the columns that hold the fields of the table's class, in the order of the fields."""
    return _columns(table.name)


def _reach(value: object, path: Path) -> object:
    for name in path:
        if value is None:
            return None
        value = getattr(value, name)
    return value


def flatten(table: Table, value: object) -> dict[str, object]:
    """Return the fields of ``value`` by column name, not yet written as cells."""
    return {column.name: _reach(value, column.path) for column in columns_of(table)}


def _has_default(item: Field[Any]) -> bool:
    return item.default is not MISSING or item.default_factory is not MISSING


def _is_absent(source: _Source, path: Path) -> bool:
    """Tell whether all columns of an optional object are empty."""
    names = [c.name for p, c in source.columns.items() if p[: len(path)] == path]
    return all(source.row.get(name) is None for name in names)


def _build(kind: type, prefix: Path, source: _Source, given: Mapping[str, object]) -> object:
    hints = get_type_hints(kind)
    values = dict(given)
    for item in fields(kind):
        path = (*prefix, item.name)
        column = source.columns.get(path)
        if item.name in given:
            continue
        if column is not None:
            if column.name in source.row:
                values[item.name] = column.codec.of_cell(source.row[column.name], source.zone)
            elif not _has_default(item):
                raise KeyError(column.name)
            continue
        inner = _nested(hints[item.name])
        if inner is None:
            continue
        optional = NoneType in get_args(hints[item.name])
        absent = optional and _is_absent(source, path)
        values[item.name] = None if absent else _build(inner, path, source, {})
    return kind(**values)


def build(table: Table, row: Row, zone: ZoneInfo, **given: object) -> Any:  # noqa: ANN401 - the class is the table's
    """Return the object that a row holds; ``given`` are the fields kept in other tables.

    Raises
    ------
    KeyError
        A column without a default is missing.
    TypeError
        A cell is empty, or of another type than was written.
    ValueError
        The text of a cell cannot be read.
    """
    columns = {column.path: column for column in columns_of(table)}
    return _build(table.kind, (), _Source(row=row, columns=columns, zone=zone), given)
