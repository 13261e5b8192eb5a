"""Settings and provenance as text by key: ``programme.tariff.km`` is ``0.45``."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import MISSING, fields, is_dataclass
from datetime import date, datetime
from enum import StrEnum
from types import MappingProxyType, NoneType
from typing import Any, get_args, get_origin, get_type_hints
from zoneinfo import ZoneInfo

__all__ = ["read_settings", "write_settings"]

Texts = Mapping[str, str]


def _write_moment(moment: datetime) -> str:
    """Return RFC 9557 text: ISO 8601 with the name of the zone behind it where it has one."""
    zone = getattr(moment.tzinfo, "key", None)
    return moment.isoformat() + (f"[{zone}]" if zone else "")


def _read_moment(text: str) -> datetime:
    stamp, _, zone = text.partition("[")
    moment = datetime.fromisoformat(stamp)
    return moment.astimezone(ZoneInfo(zone.removesuffix("]"))) if zone else moment


def _write_scalar(value: object) -> str:
    if isinstance(value, datetime):
        return _write_moment(value)
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, float):
        return repr(float(value))
    return str(value)


def _read_scalar(text: str, hint: object) -> object:
    """Return the value of ``text``; raise ``ValueError`` where it is not one of its kind."""
    if hint is bool:
        return {"true": True, "false": False}[text]
    if hint is datetime:
        return _read_moment(text)
    if hint is date:
        return date.fromisoformat(text)
    if hint in {int, float, str} or (isinstance(hint, type) and issubclass(hint, StrEnum)):
        reader: Any = hint
        return reader(text)
    msg = f"{hint}: no way to write this type into a plan file is known"
    raise TypeError(msg)


def write_settings(
    value: object, *, prefix: str, omit: frozenset[str] = frozenset()
) -> dict[str, str]:
    """Return the fields of a dataclass, and of those inside it, as text by dotted key.

    ``None`` has no entry. ``omit`` names fields of ``value`` that are kept elsewhere.
    """
    texts: dict[str, str] = {}
    for item in fields(value):  # type: ignore[arg-type]  # callers hand in dataclasses only
        if item.name in omit:
            continue
        key = f"{prefix}.{item.name}"
        entry = getattr(value, item.name)
        if is_dataclass(entry):
            texts |= write_settings(entry, prefix=key)
        elif isinstance(entry, Mapping):
            texts |= {f"{key}.{name}": _write_scalar(v) for name, v in entry.items()}
        elif entry is not None:
            texts[key] = _write_scalar(entry)
    return texts


def _read_mapping(texts: Texts, key: str, hint: object) -> Mapping[str, object]:
    of = get_args(hint)[1]
    start = f"{key}."
    return MappingProxyType(
        {
            name.removeprefix(start): _read_scalar(text, of)
            for name, text in texts.items()
            if name.startswith(start)
        }
    )


def _optional_settings(hint: object) -> type | None:
    """Return the dataclass of a field that is one or ``None``."""
    kinds = [kind for kind in get_args(hint) if is_dataclass(kind)]
    return kinds[0] if kinds and NoneType in get_args(hint) else None  # type: ignore[return-value]  # a hint is a class


def read_settings(kind: type, texts: Texts, *, prefix: str, **given: object) -> Any:  # noqa: ANN401 - the class is ``kind``
    """Return the dataclass whose fields ``write_settings`` wrote; ``given`` are the others.

    Raises
    ------
    KeyError
        The entry of a field without a default is missing.
    ValueError
        The text of an entry cannot be read.
    """
    hints = get_type_hints(kind)
    values: dict[str, object] = dict(given)
    for item in fields(kind):
        if item.name in given:
            continue
        key = f"{prefix}.{item.name}"
        hint = hints[item.name]
        if is_dataclass(hint):
            values[item.name] = read_settings(hint, texts, prefix=key)  # type: ignore[arg-type]  # a hint is a class
        elif (inner := _optional_settings(hint)) is not None:
            given_here = any(name.startswith(f"{key}.") for name in texts)
            values[item.name] = read_settings(inner, texts, prefix=key) if given_here else None
        elif get_origin(hint) is Mapping:
            values[item.name] = _read_mapping(texts, key, hint)
        elif key in texts:
            plain = next((a for a in get_args(hint) if a is not NoneType), hint)
            values[item.name] = _read_scalar(texts[key], plain)
        elif NoneType in get_args(hint):
            values[item.name] = None
        elif item.default is MISSING:
            raise KeyError(key)
    return kind(**values)
