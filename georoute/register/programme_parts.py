"""The sections of a programme file that can be read, each by itself, and where they stand."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, TypeVar

from georoute.register.codes import Code, new_finding
from georoute.register.schema import (
    BaseSection,
    CalendarSection,
    HorizonKeys,
    InspectorSection,
    RegisterSection,
    SearchSection,
    Section,
    ShiftSection,
    TariffSection,
    TravelSection,
    WorkSection,
)
from georoute.register.schema_faults import key_path, lenient

if TYPE_CHECKING:
    from collections.abc import Mapping
    from datetime import date

    from georoute.domain.findings import Finding
    from georoute.register.toml_lines import KeyLines

__all__ = ["Notebook", "Parts", "parts_of"]

_S = TypeVar("_S", bound=Section)


@dataclass(frozen=True, slots=True, kw_only=True)
class Parts:
    """What could be read of a programme file; a section too faulty to be read is ``None``.

    ``bases`` and ``inspectors`` hold the position in the file beside each section;
    ``base_ids`` are all ids written, also those of bases that are faulty otherwise.
    """

    title: str
    zone: str | None
    first_date: date | None
    last_date: date | None
    register: RegisterSection | None
    bases: tuple[tuple[int, BaseSection], ...]
    base_ids: tuple[str, ...]
    shift: ShiftSection
    calendar: CalendarSection
    inspectors: tuple[tuple[int, InspectorSection], ...]
    work: WorkSection
    tariff: TariffSection | None
    travel: TravelSection
    search: SearchSection
    raw: Mapping[str, object]

    def writes(self, *path: str | int) -> bool:
        """Tell whether the file writes a key at all, rightly or wrongly."""
        here: object = self.raw
        for part in path:
            if isinstance(here, dict):
                here = here.get(part)
            elif isinstance(here, list) and isinstance(part, int) and part < len(here):
                here = here[part]
            else:
                return False
        return here is not None


class Notebook:
    """Collects findings about keys, and knows the line of each."""

    def __init__(self, lines: KeyLines) -> None:
        self.lines = lines
        self.findings: list[Finding] = []

    def add(
        self,
        code: Code,
        message: str,
        remedy: str,
        *,
        at: tuple[str | int, ...],
        value: object = "",
        subject: str = "",
    ) -> None:
        """Add a finding about the key at a path."""
        self.findings.append(
            new_finding(
                code,
                message,
                remedy,
                row=self.lines.line_of(at),
                column=key_path(at),
                value=value,
                subject=subject,
            )
        )


def _optional(model: type[_S], raw: Mapping[str, object], key: str) -> _S:
    """Return a section all of whose keys have defaults."""
    return lenient(model, raw.get(key, {})) or model()


def _listed(model: type[_S], raw: Mapping[str, object], key: str) -> tuple[tuple[int, _S], ...]:
    entries = raw.get(key)
    if not isinstance(entries, list):
        return ()
    read = ((k, lenient(model, entry)) for k, entry in enumerate(entries))
    return tuple((k, section) for k, section in read if section is not None)


def _base_ids(raw: Mapping[str, object]) -> tuple[str, ...]:
    entries = raw.get("base")
    if not isinstance(entries, list):
        return ()
    ids = [entry.get("base_id") for entry in entries if isinstance(entry, dict)]
    return tuple(dict.fromkeys(word for word in ids if isinstance(word, str)))


def _key(raw: Mapping[str, object], key: str) -> object:
    """Return the value of one top key, or ``None`` where it is absent or wrong."""
    required = {name for name, info in HorizonKeys.model_fields.items() if info.is_required()}
    fillers: dict[str, object] = {"zone": "UTC", "first_date": "2000-01-01"}
    fillers["last_date"] = fillers["first_date"]
    section = lenient(
        HorizonKeys, {**{name: fillers[name] for name in required}, key: raw.get(key)}
    )
    return None if section is None else getattr(section, key)


def parts_of(raw: Mapping[str, object]) -> Parts:
    """Read each section of a parsed programme file by itself.

    Parameters
    ----------
    raw
        The parsed file.

    Returns
    -------
    Parts
        What could be read; the schema's own findings say what could not.
    """
    top = {name: _key(raw, name) for name in HorizonKeys.model_fields}
    return Parts(
        **top,  # type: ignore[arg-type] # each key was read by its own type
        register=lenient(RegisterSection, raw.get("register")),
        bases=_listed(BaseSection, raw, "base"),
        base_ids=_base_ids(raw),
        shift=_optional(ShiftSection, raw, "shift"),
        calendar=_optional(CalendarSection, raw, "calendar"),
        inspectors=_listed(InspectorSection, raw, "inspector"),
        work=_optional(WorkSection, raw, "work"),
        tariff=lenient(TariffSection, raw.get("tariff")),
        travel=_optional(TravelSection, raw, "travel"),
        search=_optional(SearchSection, raw, "search"),
        raw=raw,
    )
