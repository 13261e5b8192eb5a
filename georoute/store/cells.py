"""One cell of a table: how each type of the model is written to it and read from it.

Text stays text, numbers stay numbers; dates, times and collections are written as ISO 8601 and
JSON text, so that a person and any other program can read them. Every type goes there and back
without loss.
"""

from __future__ import annotations

import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from datetime import date, datetime, time
from enum import StrEnum
from types import MappingProxyType, NoneType, UnionType
from typing import TYPE_CHECKING, Any, Union, get_args, get_origin

from georoute.domain.sites import OpenInterval

if TYPE_CHECKING:
    from zoneinfo import ZoneInfo

__all__ = ["Cell", "Codec", "codec_for", "read_moment", "write_moment"]

Cell = str | int | float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Codec:
    """How values of one type become cells and cells become values.

    ``kind`` is the type of the values, ``object`` for collections; ``sql`` is the column type of
    OGC 12-128 (GeoPackage), table 1. ``write`` and ``read`` never see ``None``: an empty cell
    stands for it where ``optional`` is true.
    """

    kind: type
    sql: str
    write: Callable[[Any], Cell]
    read: Callable[[Any, ZoneInfo], Any]
    optional: bool = False

    def to_cell(self, value: object) -> Cell:
        """Return the cell that holds ``value``."""
        return None if value is None else self.write(value)

    def of_cell(self, cell: object, zone: ZoneInfo) -> object:
        """Return the value that ``cell`` holds.

        Raises
        ------
        TypeError
            The cell is empty, or of another type than was written.
        ValueError
            The text of the cell cannot be read.
        """
        if cell is None:
            if self.optional:
                return None
            msg = "the cell is empty"
            raise TypeError(msg)
        return self.read(cell, zone)


def write_moment(moment: datetime) -> str:
    """Return ISO 8601 local time with its offset from UTC, which tells both 02:30 apart."""
    return moment.isoformat()


def read_moment(text: str, zone: ZoneInfo) -> datetime:
    """Return the instant of an ISO 8601 time as local time of ``zone``.

    Raises
    ------
    ValueError
        The text is not an ISO 8601 time with an offset.
    """
    moment = datetime.fromisoformat(text)
    if moment.tzinfo is None:
        msg = f"{text}: has no offset from UTC"
        raise ValueError(msg)
    return moment.astimezone(zone)


def _checked(expected: type | tuple[type, ...]) -> Callable[[Any, ZoneInfo], Any]:
    def read(cell: object, _zone: ZoneInfo) -> object:
        if not isinstance(cell, expected):
            msg = f"{cell!r} is not what was written there"
            raise TypeError(msg)
        return cell

    return read


def _read_float(cell: float, _zone: ZoneInfo) -> float:
    return float(cell)


def _read_bool(cell: int, _zone: ZoneInfo) -> bool:
    if cell not in {0, 1}:
        msg = f"{cell!r} is neither 0 nor 1"
        raise ValueError(msg)
    return bool(cell)


def _write_interval(interval: OpenInterval) -> str:
    return f"{write_moment(interval.opens)}/{write_moment(interval.closes)}"


def _read_interval(text: str, zone: ZoneInfo) -> OpenInterval:
    opens, closes = text.split("/")
    return OpenInterval(opens=read_moment(opens, zone), closes=read_moment(closes, zone))


def _scalar(
    kind: type, sql: str, write: Callable[[Any], Cell], read: Callable[[Any, ZoneInfo], Any]
) -> Codec:
    return Codec(kind=kind, sql=sql, write=write, read=read)


_SCALARS: Mapping[object, Codec] = MappingProxyType(
    {
        codec.kind: codec
        for codec in (
            _scalar(str, "TEXT", str, _checked(str)),
            _scalar(int, "INTEGER", int, _checked(int)),
            _scalar(float, "REAL", float, _read_float),
            _scalar(bool, "BOOLEAN", int, _read_bool),
            _scalar(date, "DATE", date.isoformat, lambda c, _z: date.fromisoformat(c)),
            _scalar(time, "TEXT", time.isoformat, lambda c, _z: time.fromisoformat(c)),
            _scalar(datetime, "TEXT", write_moment, read_moment),
            _scalar(OpenInterval, "TEXT", _write_interval, _read_interval),
        )
    }
)


def _dump(value: object) -> str:
    return json.dumps(value, ensure_ascii=False, separators=(", ", ": "))


def _pairs(first: Codec, second: Codec) -> Codec:
    """Return the codec of a mapping."""

    def write(value: Mapping[Any, Any]) -> str:
        return _dump({str(first.to_cell(k)): second.to_cell(v) for k, v in value.items()})

    def read(cell: str, zone: ZoneInfo) -> Mapping[Any, Any]:
        found = json.loads(cell).items()
        return MappingProxyType({first.of_cell(k, zone): second.of_cell(v, zone) for k, v in found})

    return Codec(kind=object, sql="TEXT", write=write, read=read)


def _many(collection: type, element: Codec) -> Codec:
    """Return the codec of a set (written sorted) or of a tuple of any length."""

    def write(value: Any) -> str:  # noqa: ANN401 - a set or a tuple of whatever ``element`` takes
        cells = [element.to_cell(item) for item in value]
        return _dump(sorted(cells, key=_sort_key) if collection is frozenset else cells)

    def read(cell: str, zone: ZoneInfo) -> object:
        return collection(element.of_cell(item, zone) for item in json.loads(cell))

    return Codec(kind=object, sql="TEXT", write=write, read=read)


def _sort_key(cell: Cell) -> tuple[str, float, str]:
    number = float(cell) if isinstance(cell, (int, float)) else 0.0
    return type(cell).__name__, number, str(cell)


def _fixed(elements: tuple[Codec, ...]) -> Codec:
    """Return the codec of a tuple of known length, as an element of a collection."""

    def write(value: Any) -> Any:  # noqa: ANN401 - a list is a cell only inside JSON
        return [codec.to_cell(item) for codec, item in zip(elements, value, strict=True)]

    def read(cell: Any, zone: ZoneInfo) -> object:  # noqa: ANN401 - as ``write``
        return tuple(c.of_cell(item, zone) for c, item in zip(elements, cell, strict=True))

    return Codec(kind=object, sql="TEXT", write=write, read=read)


def _collection(origin: object, args: tuple[object, ...]) -> Codec:
    if origin is frozenset:
        return _many(frozenset, codec_for(args[0]))
    if origin is Mapping:
        return _pairs(codec_for(args[0]), codec_for(args[1]))
    if args[-1] is Ellipsis:
        return _many(tuple, codec_for(args[0]))
    return _fixed(tuple(codec_for(arg) for arg in args))


def codec_for(hint: object) -> Codec:
    """Return the codec of a type hint of the model.

    Raises
    ------
    TypeError
        No way to write such a type is known.
    """
    if hint in _SCALARS:
        return _SCALARS[hint]
    if isinstance(hint, type) and issubclass(hint, StrEnum):
        return _scalar(str, "TEXT", lambda v: str(v.value), lambda c, _z: hint(c))
    origin, args = get_origin(hint), get_args(hint)
    if origin in {Union, UnionType} and NoneType in args:
        inner = codec_for(next(arg for arg in args if arg is not NoneType))
        return replace(inner, optional=True)
    if origin in {frozenset, tuple, Mapping}:
        return _collection(origin, args)
    msg = f"{hint}: no way to write this type into a plan file is known"
    raise TypeError(msg)
