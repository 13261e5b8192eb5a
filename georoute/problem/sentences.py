"""The sentence for a reason and its figures, in plain English."""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.domain.plan import ReasonCode

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    Figures = Mapping[str, float]

__all__ = ["reason_text"]

MIN_PER_HOUR = 60
TINY = 1e-9


def _span(minutes: float) -> str:
    """Return a length of time: minutes up to two hours, else hours and minutes."""
    whole = max(0, round(minutes))
    if whole == 0 and minutes > TINY:
        return "less than a minute"
    if whole < 2 * MIN_PER_HOUR:
        return f"{whole} min"
    hours, rest = divmod(whole, MIN_PER_HOUR)
    return f"{hours} h {rest} min" if rest else f"{hours} h"


def _load(value: float) -> str:
    return f"{value:.3f}".rstrip("0").rstrip(".")


def _too_far(figures: Figures) -> str:
    parts = (
        f"{_span(figures['out_min'])} out, {_span(figures['work_min'])} work, "
        f"{_span(figures['back_min'])} back"
    )
    if figures["write_up_min"] > 0:
        parts += f", {_span(figures['write_up_min'])} write-up"
    return (
        f"needs {_span(figures['needed_min'])} as the only stop of a day ({parts}); the longest "
        f"suitable shift is {_span(figures['shift_min'])}: {_span(figures['short_min'])} too long"
    )


def _closed(figures: Figures) -> str:
    if figures["late"]:
        return (
            "closed: even as the first stop of the day it is reached "
            f"{_span(figures['short_min'])} after it closes for the last time"
        )
    return (
        "closed: it opens so late that, even as the only stop of the day, the shift would end "
        f"{_span(figures['short_min'])} too late"
    )


def _load_limit(figures: Figures) -> str:
    need, over = _load(figures["load"]), _load(figures["over_load"])
    if "load_limit" in figures:
        limit = _load(figures["load_limit"])
        return f"its load of {need} is {over} more than any suitable shift may carry ({limit})"
    free = _load(figures["free_load"])
    return f"its load of {need} is {over} more than any suitable shift has left as planned ({free})"


def _no_time(figures: Figures) -> str:
    if figures["allowed_shifts"] == 0:
        return "none of the inspectors who may do it works a shift on the dates of the programme"
    return (
        f"no working time left: it needs at least {_span(figures['needed_min'])} of work and "
        f"detour; as planned, the best day is {_span(figures['short_min'])} short, and all days "
        f"that suit have {_span(figures['free_min'])} left together"
    )


def _not_found(figures: Figures) -> str:
    if "short_min" not in figures:
        return "the search found no way to reach it between other visits; not proven impossible"
    if figures["short_min"] == 0:
        return (
            "it would fit into a day as planned; the search ended before placing it. Search "
            "longer to place it"
        )
    return (
        f"the search found no place: as planned the best day is {_span(figures['short_min'])} "
        f"short, though the days that suit have {_span(figures['free_min'])} left together; not "
        "proven impossible"
    )


def _after_latest(figures: Figures) -> str:
    if figures.get("shifts_before_earliest", 0.0) > 0:
        return "no shift that may take it is worked between its earliest and its latest date"
    return "no shift that may take it is worked on or before its latest date"


def _before_earliest(_: Figures) -> str:
    return "no shift that may take it is worked on or after its earliest date"


def _unreachable(_: Figures) -> str:
    return "there is no way out to it and back from any base that may serve it"


_SENTENCES: dict[ReasonCode, Callable[[Figures], str]] = {
    ReasonCode.TOO_FAR_FOR_SHIFT: _too_far,
    ReasonCode.CLOSED: _closed,
    ReasonCode.LOAD_LIMIT: _load_limit,
    ReasonCode.NO_WORKING_TIME_LEFT: _no_time,
    ReasonCode.NOT_FOUND_BY_SEARCH: _not_found,
    ReasonCode.AFTER_LATEST: _after_latest,
    ReasonCode.BEFORE_EARLIEST: _before_earliest,
    ReasonCode.UNREACHABLE: _unreachable,
}


def reason_text(code: ReasonCode, figures: Figures) -> str:
    """Return the reason as a sentence without its full stop.

    ``figures`` are those that came with the code; a code without a sentence of its own is
    returned in words.
    """
    sentence = _SENTENCES.get(code)
    return code.replace("_", " ") if sentence is None else sentence(figures)
