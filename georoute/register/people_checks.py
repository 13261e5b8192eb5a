"""Check bases and inspectors: ids, coordinates, bases named, shifts."""

from __future__ import annotations

import unicodedata
from dataclasses import dataclass
from datetime import time
from typing import TYPE_CHECKING

from georoute.register.codes import Code, nearest_words
from georoute.register.schema import ShiftKeys
from georoute.register.schema_faults import key_path

if TYPE_CHECKING:
    from collections.abc import Callable

    from georoute.register.programme_parts import Notebook, Parts
    from georoute.register.schema import InspectorSection

__all__ = ["ShiftRules", "check_bases", "check_inspectors", "shift_of"]

_LAT_LIMIT, _LON_LIMIT = 90.0, 180.0
_HOUR_S, _MINUTE_S = 3600.0, 60.0
_DAY_S = 24 * _HOUR_S


@dataclass(frozen=True, slots=True, kw_only=True)
class ShiftRules:
    """The shift of one inspector, shared keys included."""

    start: time
    end: time
    paid_s: float
    overtime_s: float
    write_up_s: float
    load_limit: float | None

    @property
    def length_s(self) -> float:
        """Return seconds from start to end; an end at or before the start is the next day's."""
        return _clock_length_s(self.start, self.end)


def _seconds(clock: time) -> float:
    return clock.hour * _HOUR_S + clock.minute * _MINUTE_S + clock.second + clock.microsecond / 1e6


def _clock_length_s(start: time, end: time) -> float:
    length = _seconds(end) - _seconds(start)
    return length if length > 0 else length + _DAY_S


def shift_of(parts: Parts, inspector: InspectorSection) -> ShiftRules | None:
    """Return the shift of an inspector; ``None`` where its start or end is stated nowhere."""

    def pick(key: str) -> object:
        own: object = getattr(inspector, key)
        shared: object = getattr(parts.shift, key)
        return shared if own is None else own

    def hours(key: str) -> float:
        value = pick(key)
        return value if isinstance(value, float) else 0.0

    start, end = pick("shift_start"), pick("shift_end")
    if not isinstance(start, time) or not isinstance(end, time):
        return None
    limit = pick("load_limit")
    paid_s = hours("paid_h") * _HOUR_S
    return ShiftRules(
        start=start,
        end=end,
        paid_s=_clock_length_s(start, end) if pick("paid_h") is None else paid_s,
        overtime_s=hours("overtime_limit_h") * _HOUR_S,
        write_up_s=hours("write_up_min") * _MINUTE_S,
        load_limit=limit if isinstance(limit, float) else None,
    )


def _check_id(
    notebook: Notebook, at: tuple[str | int, ...], written: str, *, separators: str
) -> None:
    if not written.strip():
        notebook.add(Code.EMPTY_TEXT, "the id is blank", "write a short id", at=at, value=written)
    elif any(unicodedata.category(letter) in {"Cc", "Zl", "Zp"} for letter in written):
        notebook.add(
            Code.CONTROL_CHARACTER,
            "the id holds a character that cannot be seen (line break, tab or the like)",
            "type the id anew",
            at=at,
            value=ascii(written)[1:-1],
        )
    elif written != written.strip():
        notebook.add(
            Code.BLANKS_IN_ID,
            "the id begins or ends with blanks; they are kept",
            "delete the blanks",
            at=at,
            value=f"`{written}`",
        )
    elif any(sign in written for sign in separators):
        notebook.add(
            Code.SEPARATOR_IN_ID,
            "the id holds `;` or `,`, which part the ids in a register's cell",
            "write another sign",
            at=at,
            value=written,
        )


def _check_once(
    notebook: Notebook, seen: dict[str, tuple[str | int, ...]], at: tuple[str | int, ...], word: str
) -> None:
    if word in seen:
        line = notebook.lines.line_of(seen[word])
        where = key_path(seen[word]) if line is None else f"line {line}"
        notebook.add(
            Code.DUPLICATE_ID,
            f"the id already stands in {where}",
            "give each an id of its own",
            at=at,
            value=word,
            subject=word,
        )
    seen.setdefault(word, at)


def check_bases(parts: Parts, notebook: Notebook) -> None:
    """Check ids and coordinates of bases; findings go to the notebook."""
    seen: dict[str, tuple[str | int, ...]] = {}
    for k, base in parts.bases:
        at = ("base", k)
        _check_id(notebook, (*at, "base_id"), base.base_id, separators="")
        _check_once(notebook, seen, (*at, "base_id"), base.base_id)
        for key, value, limit in (("lat", base.lat, _LAT_LIMIT), ("lon", base.lon, _LON_LIMIT)):
            if abs(value) > limit:
                notebook.add(
                    Code.COORDINATE_OUT_OF_RANGE,
                    f"{key} lies between -{limit:g} and {limit:g} degrees",
                    "write decimal degrees (WGS 84); look for a missing decimal point, or for "
                    "lat and lon exchanged",
                    at=(*at, key),
                    value=f"{value:.12g}",
                    subject=base.base_id,
                )
        if base.lat == 0.0 and base.lon == 0.0:
            notebook.add(
                Code.ZERO_COORDINATE,
                "both coordinates are 0, which is what an empty form leaves behind",
                "look the place up and write its coordinates",
                at=(*at, "lat"),
                value="0, 0",
                subject=base.base_id,
            )


def check_inspectors(parts: Parts, notebook: Notebook) -> None:
    """Check ids, bases and shifts of inspectors; findings go to the notebook."""
    seen: dict[str, tuple[str | int, ...]] = {}
    for k, inspector in parts.inspectors:
        at = ("inspector", k)
        _check_id(notebook, (*at, "inspector_id"), inspector.inspector_id, separators=";,")
        _check_once(notebook, seen, (*at, "inspector_id"), inspector.inspector_id)
        for key in ("start_base", "end_base"):
            written = getattr(inspector, key)
            if written is not None and written not in parts.base_ids and parts.base_ids:
                notebook.add(
                    Code.UNKNOWN_BASE,
                    f"there is no base `{written}`",
                    nearest_words(written, parts.base_ids),
                    at=(*at, key),
                    value=written,
                    subject=inspector.inspector_id,
                )
        if not parts.writes(*at, "start_base") and len(parts.base_ids) > 1:
            known = ", ".join(f"`{word}`" for word in parts.base_ids)
            notebook.add(
                Code.UNKNOWN_BASE,
                "there are several bases and none is named for this inspector",
                f"add `start_base`, one of {known}",
                at=(*at, "start_base"),
                subject=inspector.inspector_id,
            )
        _check_shift(parts, notebook, at, inspector)


def _check_shift(
    parts: Parts, notebook: Notebook, at: tuple[str | int, ...], inspector: InspectorSection
) -> None:
    shift = shift_of(parts, inspector)
    subject = inspector.inspector_id
    if shift is None:
        for key in ("shift_start", "shift_end"):
            if not parts.writes(*at, key) and not parts.writes("shift", key):
                notebook.add(
                    Code.MISSING_KEY,
                    f"`{key}` is stated neither here nor in [shift]",
                    f'add `{key} = "08:00"` in one of the two places',
                    at=(*at, key),
                    subject=subject,
                )
        return

    def place(key: str) -> tuple[str | int, ...]:
        return (*at, key) if getattr(inspector, key) is not None else ("shift", key)

    if shift.start == shift.end:
        notebook.add(
            Code.SHIFT_TIMES_EQUAL,
            f"the shift starts and ends at {shift.start:%H:%M}",
            "write two times; an end before the start is taken for the next day's",
            at=place("shift_end"),
            value=f"{shift.end:%H:%M}",
            subject=subject,
        )
        return
    unread = any(
        parts.writes(*where, key) and getattr(section, key) is None
        for where, section in ((at, inspector), (("shift",), parts.shift))
        for key in ShiftKeys.model_fields
    )
    if not unread:  # else the lengths are not what is meant
        _check_lengths(notebook, shift, place, subject)


def _check_lengths(
    notebook: Notebook,
    shift: ShiftRules,
    place: Callable[[str], tuple[str | int, ...]],
    subject: str,
) -> None:
    longest = min(shift.length_s, shift.paid_s + shift.overtime_s)
    if shift.write_up_s >= longest:
        notebook.add(
            Code.NO_TIME_LEFT,
            f"the write-up takes {shift.write_up_s / _MINUTE_S:g} min, the working day has "
            f"{longest / _MINUTE_S:g} min",
            "shorten the write-up, or lengthen paid_h or the shift",
            at=place("write_up_min") if shift.write_up_s else place("paid_h"),
            value=f"{shift.write_up_s / _MINUTE_S:g}",
            subject=subject,
        )
    elif shift.paid_s + shift.overtime_s > shift.length_s and (
        shift.overtime_s > 0 or shift.paid_s > shift.length_s
    ):
        notebook.add(
            Code.OVERTIME_BEYOND_SHIFT,
            f"paid hours and overtime come to {(shift.paid_s + shift.overtime_s) / _HOUR_S:g} h, "
            f"the shift ends after {shift.length_s / _HOUR_S:g} h",
            "let the shift end later if the hours are to be used in full",
            at=place("overtime_limit_h") if shift.overtime_s else place("paid_h"),
            value=f"{shift.overtime_s / _HOUR_S:g}",
            subject=subject,
        )
