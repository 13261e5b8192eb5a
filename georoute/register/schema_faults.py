"""Turn what the schema refuses into findings in the words of the trade."""

from __future__ import annotations

import inspect
from typing import TYPE_CHECKING, Any, TypeVar, get_args, get_origin

from pydantic import BaseModel, ValidationError

from georoute.register.codes import Code, nearest_words, new_finding
from georoute.register.schema import ProgrammeFile, Words

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from pydantic.fields import FieldInfo

    from georoute.domain.findings import Finding
    from georoute.register.toml_lines import KeyLines

__all__ = ["dug", "key_path", "keys_of", "lenient", "schema_faults", "words_of"]

_BOUNDS = {
    "greater_than": ("above", "gt"),
    "greater_than_equal": ("at least", "ge"),
    "less_than": ("below", "lt"),
    "less_than_equal": ("at most", "le"),
}
_TYPE_WORDS = {
    "bool": "true or false",
    "date": "a date",
    "datetime": "a date with a time of day",
    "dict": "a section",
    "float": "a number",
    "int": "a whole number",
    "list": "a list",
    "str": "text",
    "time": "a clock time",
}

_M = TypeVar("_M", bound=BaseModel)

Location = tuple[str | int, ...]


def key_path(location: Location) -> str:
    """Return a key as a person counts: ``inspector[2].shift_start`` is the second inspector's."""
    text = ""
    for part in location:
        text += f"[{part + 1}]" if isinstance(part, int) else f".{part}" if text else part
    return text


def dug(annotation: Any) -> Iterator[Any]:  # noqa: ANN401 - type forms share no type
    """Yield an annotation and everything inside it."""
    yield annotation
    for inner in get_args(annotation):
        yield from dug(inner)


def _model_in(annotation: Any) -> type[BaseModel] | None:  # noqa: ANN401 - as dug
    models = (
        form
        for form in dug(annotation)
        if isinstance(form, type) and get_origin(form) is None and issubclass(form, BaseModel)
    )
    return next(models, None)


def words_of(field: FieldInfo) -> Words:
    """Return how the values of a field are called."""
    found = [form for form in dug(field.annotation) if isinstance(form, Words)]
    found += [form for form in field.metadata if isinstance(form, Words)]
    return found[0] if found else Words("section", "")


def keys_of(model: type[BaseModel]) -> dict[str, FieldInfo]:
    """Return the fields of a section by key: plain ones before sections, own before shared."""
    own = inspect.get_annotations(model)
    fields = model.model_fields

    def rank(name: str) -> tuple[bool, bool]:
        return _model_in(fields[name].annotation) is not None, name not in own

    names = sorted(fields, key=rank)
    return {fields[name].alias or name: fields[name] for name in names}


def _field_at(location: Location) -> tuple[type[BaseModel] | None, FieldInfo | None]:
    """Return the section a key stands in, and its field where the schema knows it."""
    model: type[BaseModel] | None = ProgrammeFile
    parent, field = model, None
    for part in location:
        if isinstance(part, int):
            continue
        if model is None:
            return parent, field  # inside a free table, such as the column mapping
        parent = model
        field = keys_of(model).get(part)
        model = None if field is None else _model_in(field.annotation)
    return parent, field


def lenient(model: type[_M], raw: object) -> _M | None:
    """Read a section without the keys that are wrong; ``None`` where too little is left."""
    if not isinstance(raw, dict):
        return None
    data = dict(raw)
    while True:
        try:
            return model.model_validate(data)
        except ValidationError as error:
            wrong = {entry["loc"][0] for entry in error.errors() if entry["loc"]} & set(data)
            if not wrong:
                return None
            data = {key: value for key, value in data.items() if key not in wrong}


def schema_faults(raw: Mapping[str, object], lines: KeyLines) -> list[Finding]:
    """Return all that the schema refuses in a programme file.

    Parameters
    ----------
    raw
        The parsed file.
    lines
        Where its keys stand.

    Returns
    -------
    list of Finding
        One fault per refusal, with key path, line, value and remedy.
    """
    try:
        ProgrammeFile.model_validate(raw)
    except ValidationError as error:
        return list(_faults(error, lines))
    return []


def _faults(error: ValidationError, lines: KeyLines) -> Iterator[Finding]:
    for entry in error.errors(include_url=False):
        location = tuple(entry["loc"])
        # A mapping's own key comes with a mark of the library behind it.
        location = tuple(part for part in location if part != "[key]")
        parent, field = _field_at(location)
        code, message, remedy = _explained(entry, location, parent, field)
        missing = entry["type"] == "missing"
        yield new_finding(
            code,
            message,
            remedy,
            row=lines.line_of(location[:-1] if missing else location),
            column=key_path(location),
            value="" if missing else _value_words(entry["input"]),
        )


def _value_words(value: object) -> str:
    if isinstance(value, (dict, list)):
        return f"({_TYPE_WORDS[type(value).__name__]})"
    try:
        return str(value)
    except ValueError:  # Python refuses to write whole numbers of thousands of digits
        return "(a monstrous number)"


def _explained(  # noqa: PLR0911 - one way out per kind of refusal
    entry: Any,  # noqa: ANN401 - a typed dictionary of a private module
    location: Location,
    parent: type[BaseModel] | None,
    field: FieldInfo | None,
) -> tuple[Code, str, str]:
    """Return code, message and remedy of one refusal."""
    kind, key = str(entry["type"]), str(location[-1]) if location else ""
    known = list(keys_of(parent)) if parent is not None else []
    if kind == "extra_forbidden":
        return Code.UNKNOWN_KEY, f"there is no key `{key}` here", nearest_words(key, known)
    words = words_of(field) if field is not None else Words("section", "")
    if kind == "missing":
        return _missing(key, field, words)
    if kind in _BOUNDS:
        return _beyond(kind, entry, location, words)
    if kind == "finite_number":
        return Code.NOT_FINITE, "the number is infinite or not a number", "write a finite number"
    if kind == "unknown_weekday":
        days = ", ".join(f"`{day}`" for day in ("mon", "tue", "wed", "thu", "fri", "sat", "sun"))
        return Code.UNKNOWN_WEEKDAY, "there is no such weekday", f"write {days}, or 1 to 7"
    if kind == "string_too_short":
        return Code.EMPTY_TEXT, f"`{key}` is empty", f"write a {words.name}: {words.example}"
    if kind == "too_short":
        return Code.MISSING_KEY, f"there is no {key}", f"add at least one [[{key}]]"
    return _wrong_type(entry["input"], location, field, words)


def _missing(key: str, field: FieldInfo | None, words: Words) -> tuple[Code, str, str]:
    message = f"the key `{key}` is needed and absent"
    if field is not None and _model_in(field.annotation) is not None:
        form = f"[[{key}]]" if get_origin(field.annotation) is list else f"[{key}]"
        return Code.MISSING_KEY, f"the section {form} is needed and absent", f"add {form}"
    return Code.MISSING_KEY, message, f"add `{key} = {words.example}`"


def _beyond(kind: str, entry: Any, location: Location, words: Words) -> tuple[Code, str, str]:  # noqa: ANN401 - as _explained
    bound_words, bound_key = _BOUNDS[kind]
    bound = f"{entry['ctx'][bound_key]:.15g}"
    if location[0] == "tariff":
        return Code.NEGATIVE_MONEY, "a price cannot be below 0", "write a price of 0 or more"
    return (
        Code.VALUE_OUT_OF_RANGE,
        f"expected {bound_words} {bound}",
        f"write {words.name} of {bound_words} {bound}, for instance {words.example}",
    )


def _wrong_type(
    value: object, location: Location, field: FieldInfo | None, words: Words
) -> tuple[Code, str, str]:
    got = _TYPE_WORDS.get(type(value).__name__, "something else")
    wants_list = field is not None and any(
        get_origin(form) is list or form is list for form in dug(field.annotation)
    )
    key = next((part for part in reversed(location) if isinstance(part, str)), "")
    if field is not None and _model_in(field.annotation) is not None:
        form = f"[[{key}]]" if wants_list else f"[{key}]"
        return Code.WRONG_TYPE, f"expected the section {form}, got {got}", f"begin it with {form}"
    expected = f"a list of {words.name}s" if wants_list else words.name
    example = f"[{words.example}]" if wants_list else words.example
    return Code.WRONG_TYPE, f"expected {expected}, got {got}", f"write for instance {example}"
