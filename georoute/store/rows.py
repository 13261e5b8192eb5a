"""Objects of the model to rows of a table and back, driven by the fields of their classes."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import MISSING, dataclass, fields, is_dataclass
from functools import cache
from types import NoneType
from typing import TYPE_CHECKING, Any, get_args, get_type_hints

from georoute.store.cells import Codec, codec_for
from georoute.store.schema import TABLES

if TYPE_CHECKING:
    from collections.abc import Iterator
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
class _Slot:
    """A field of a class: the column that holds it, or the class whose fields become columns."""

    name: str
    has_default: bool
    optional: bool
    column: Column | None = None
    kind: type | None = None
    inner: tuple[_Slot, ...] = ()

    def columns(self) -> Iterator[Column]:
        """Yield the columns that hold the field."""
        if self.column is not None:
            yield self.column
        for slot in self.inner:
            yield from slot.columns()


def _nested(hint: object) -> type | None:
    """Return the class of the model whose fields become columns, where ``hint`` is such a one."""
    args = get_args(hint)
    if args and NoneType not in args:
        return None  # a collection fits into one cell
    for candidate in (hint, *args):
        if isinstance(candidate, type) and is_dataclass(candidate):
            return candidate
    return None


def _slots_of(kind: type, prefix: Path, table: Table, omit: frozenset[str]) -> tuple[_Slot, ...]:
    hints = get_type_hints(kind)
    slots = []
    for item in fields(kind):
        if item.name in omit:
            continue
        path, hint = (*prefix, item.name), hints[item.name]
        inner = _nested(hint)
        name = "_".join(path)
        slots.append(
            _Slot(
                name=item.name,
                has_default=item.default is not MISSING or item.default_factory is not MISSING,
                optional=NoneType in get_args(hint),
                kind=inner,
                inner=() if inner is None else _slots_of(inner, path, table, frozenset()),
                column=Column(name=table.rename.get(name, name), path=path, codec=codec_for(hint))
                if inner is None
                else None,
            )
        )
    return tuple(slots)


@cache
def _slots(name: str) -> tuple[_Slot, ...]:
    """Return the fields of a table's class; worked out once, rows come in thousands."""
    table = TABLES[name]
    return _slots_of(table.kind, (), table, table.omit)


def columns_of(table: Table) -> tuple[Column, ...]:
    """Return the columns that hold the fields of the table's class, in the order of the fields."""
    return tuple(column for slot in _slots(table.name) for column in slot.columns())


def _reach(value: object, path: Path) -> object:
    for name in path:
        if value is None:
            return None
        value = getattr(value, name)
    return value


def flatten(columns: tuple[Column, ...], value: object) -> tuple[object, ...]:
    """Return the fields of ``value`` in the order of ``columns``, not yet written as cells."""
    return tuple(_reach(value, column.path) for column in columns)


def _build(kind: type, slots: tuple[_Slot, ...], row: Row, zone: ZoneInfo, given: Row) -> object:
    values = dict(given)
    for slot in slots:
        column = slot.column
        if column is not None:
            if column.name in row:
                values[slot.name] = column.codec.of_cell(row[column.name], zone)
            elif not slot.has_default:
                raise KeyError(column.name)
        elif slot.optional and all(row.get(c.name) is None for c in slot.columns()):
            values[slot.name] = None
        elif slot.kind is not None:
            values[slot.name] = _build(slot.kind, slot.inner, row, zone, {})
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
    return _build(table.kind, _slots(table.name), row, zone, given)
