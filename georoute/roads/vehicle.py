"""Height, weight and width: what a road bears against what the vehicle is."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Mapping

    from georoute.roads.speeds import SpeedProfile

__all__ = ["read_metres", "read_tonnes", "vehicle_obstacle"]

_M_PER_FOOT = 0.3048
_M_PER_INCH = 0.0254
_TONNES: Mapping[str, float] = {
    "": 1.0,
    "t": 1.0,
    "tonnes": 1.0,
    "tonne": 1.0,
    "kg": 0.001,
    "st": 0.90718474,
    "lt": 1.0160469088,
    "lb": 0.00045359237,
    "lbs": 0.00045359237,
    "cwt": 0.05080234544,
}
_METRES = re.compile(r"(\d+(?:[.,]\d+)?)\s*(m|cm)?")
_FEET = re.compile(r"(\d+)\s*(?:'|ft)\s*(?:(\d+(?:\.\d+)?)\s*(?:\"|''|in))?")
_WEIGHT = re.compile(r"(\d+(?:[.,]\d+)?)\s*([a-z]*)")
_NO_LIMIT = frozenset({"none", "default", "unsigned", "no_sign", "below_default", "no_indications"})


def read_metres(text: str) -> float | None:
    """Return a height or width in metres: ``3.5``, ``3.5 m``, ``350 cm``, ``12'6"``, ``12 ft``."""
    text = text.strip().lower()
    metric = _METRES.fullmatch(text)
    if metric:
        return float(metric[1].replace(",", ".")) * (0.01 if metric[2] == "cm" else 1.0)
    feet = _FEET.fullmatch(text)
    if feet:
        return float(feet[1]) * _M_PER_FOOT + float(feet[2] or 0) * _M_PER_INCH
    return None


def read_tonnes(text: str) -> float | None:
    """Return a weight in tonnes: ``3.5``, ``3.5 t``, ``3500 kg``, ``10 st`` (short tons)."""
    weight = _WEIGHT.fullmatch(text.strip().lower())
    if not weight or weight[2] not in _TONNES:
        return None
    return float(weight[1].replace(",", ".")) * _TONNES[weight[2]]


def vehicle_obstacle(tags: Mapping[str, str], *, profile: SpeedProfile) -> tuple[str, str]:
    """Return the code of what keeps the vehicle out, with the tag; two empty texts if nothing.

    Wiki: Key:maxheight, Key:maxweight, Key:maxweightrating, Key:maxwidth. A limit that cannot be
    read is told as ``vehicle_limit_unread`` and keeps nothing out.
    """
    checks = (
        ("vehicle_too_high", profile.height_m, ("maxheight", "maxheight:physical"), read_metres),
        (
            "vehicle_too_heavy",
            profile.weight_t,
            ("maxweight", "maxweight:physical", "maxweightrating"),
            read_tonnes,
        ),
        ("vehicle_too_wide", profile.width_m, ("maxwidth", "maxwidth:physical"), read_metres),
    )
    unread = ""
    for code, own, keys, read in checks:
        for key in keys if own is not None else ():
            text = tags.get(key)
            if text is None or text.strip().lower() in _NO_LIMIT:
                continue
            limit = read(text)
            if limit is None:
                unread = f"{key}={text}"
            elif own is not None and own > limit:
                return code, f"{key}={text}"
    return ("vehicle_limit_unread", unread) if unread else ("", "")
