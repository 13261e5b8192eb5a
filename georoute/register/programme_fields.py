"""The table of all keys of programme.toml, made from the schema itself."""

from __future__ import annotations

from datetime import date, time
from typing import TYPE_CHECKING, NamedTuple, get_origin

from pydantic import BaseModel

from georoute.register.schema import ProgrammeFile
from georoute.register.schema_faults import dug, keys_of, words_of

if TYPE_CHECKING:
    from collections.abc import Iterator

    from pydantic.fields import FieldInfo

__all__ = ["ProgrammeField", "programme_fields"]


class ProgrammeField(NamedTuple):
    """One row of the table of keys."""

    key: str
    kind: str
    default: str
    meaning: str


def programme_fields() -> Iterator[ProgrammeField]:
    """Yield every key of the programme file: key, kind of value, default, meaning.

    Keys of sections are written ``section.key``, those of repeated sections ``[[section]] key``.

    Yields
    ------
    ProgrammeField
        In the order of the schema.
    """
    yield from _rows(ProgrammeFile, "")


def _rows(model: type[BaseModel], prefix: str) -> Iterator[ProgrammeField]:
    for key, field in keys_of(model).items():
        inner = _section_in(field)
        repeated = get_origin(field.annotation) is list
        if inner is not None and not _written_inline(inner):
            yield from _rows(inner, f"[[{key}]] " if repeated else f"{prefix}{key}.")
        else:
            yield ProgrammeField(
                f"{prefix}{key}", _kind(field), _default(field), str(field.description)
            )


def _section_in(field: FieldInfo) -> type[BaseModel] | None:
    found = (
        form
        for form in dug(field.annotation)
        if isinstance(form, type) and get_origin(form) is None and issubclass(form, BaseModel)
    )
    return next(found, None)


def _written_inline(model: type[BaseModel]) -> bool:
    return set(model.model_fields) == {"date", "name"}


def _kind(field: FieldInfo) -> str:
    word = words_of(field).name
    if get_origin(field.annotation) is dict:
        number = any(form is float for form in dug(field.annotation))
        return "table of numbers" if number else "table of text"
    if any(get_origin(form) is list for form in dug(field.annotation)):
        return "list of holidays" if _section_in(field) is not None else f"list of {word}s"
    return word


def _default(field: FieldInfo) -> str:
    if field.is_required():
        return "needed"
    value = field.get_default(call_default_factory=True)
    if value is None or value in ("", [], {}):
        return ""
    if isinstance(value, time):
        return f"{value:%H:%M}"
    if isinstance(value, date):
        return value.isoformat()
    if isinstance(value, float):
        return f"{value:g}"
    return str(value)
