"""What run lists and run sheets say of the roads of a leg."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from georoute.domain.plan import Leg
    from georoute.domain.roads import RoadPoint
    from georoute.publishing.figures import Figures

__all__ = ["NO_WAY", "WayWords", "last_metres", "way_words"]

_MOST_NAMES = 4
_SHORT_M = 60.0
"""A road driven for less is a crossing or a slip road; it is counted, not named."""
_TOLD_APART_M = 30.0
_ROUND_M = 10.0
_KM_M = 1000.0


@dataclass(frozen=True, slots=True)
class WayWords:
    """The roads of a leg and what to mind on it; empty for a straight leg of a straight plan."""

    roads: str = ""
    ferry: str = ""


NO_WAY = WayWords()


def _merged(roads: tuple[tuple[str, float], ...]) -> list[tuple[str, float]]:
    """Return roads in the order driven; crossings and slip roads do not part one."""
    merged: list[tuple[str, float]] = []
    for name, metres in roads:
        if merged and (merged[-1][0] == name or (not name and metres < _SHORT_M)):
            merged[-1] = (merged[-1][0], merged[-1][1] + metres)
        elif not name or metres >= _SHORT_M:
            merged.append((name, metres))
    return merged


def _length(metres: float, figures: Figures) -> str:
    rounded = max(_ROUND_M, round(metres / _ROUND_M) * _ROUND_M)
    if rounded < _KM_M:
        return figures.words("scale_metres", metres=f"{rounded:.0f}")
    return figures.words("kilometres", km=figures.number(metres / _KM_M, 1))


def _roads_text(leg: Leg, figures: Figures) -> str:
    words, merged = figures.words, _merged(leg.roads)
    named = [k for k, (name, _) in enumerate(merged) if name]
    if not named:
        return words("way_unnamed")
    longest = sorted(sorted(named, key=lambda k: -merged[k][1])[:_MOST_NAMES])
    told: list[tuple[str, float]] = []
    for name, metres in (merged[k] for k in longest):
        if told and told[-1][0] == name:  # a shorter road between its two parts is not told
            told[-1] = (name, told[-1][1] + metres)
        else:
            told.append((name, metres))
    parts = [f"{name} {_length(metres, figures)}" for name, metres in told]
    text = words("way_then").join(parts)
    # only named roads are counted: data parts an unnamed one at will
    others = len({merged[k][0] for k in named} - {merged[k][0] for k in longest})
    if not others:
        return words("way_by", roads=text)
    key = "way_by_more_one" if others == 1 else "way_by_more"
    return words(key, roads=text, count=others)


def way_words(leg: Leg, figures: Figures) -> WayWords:
    """Return what is said of the roads of a leg."""
    if not leg.path:
        return NO_WAY
    ferry = figures.words("way_ferry") if leg.ferry else ""
    return WayWords(roads=_roads_text(leg, figures), ferry=ferry)


def last_metres(point: RoadPoint | None, figures: Figures) -> str:
    """Return how far a site lies from where driving ends, where that is worth a word."""
    if point is None or point.distance_m <= _TOLD_APART_M:
        return ""
    words, length = figures.words, _length(point.distance_m, figures)
    if point.road:
        return words("off_road_named", length=length, road=point.road)
    return words("off_road", length=length)
