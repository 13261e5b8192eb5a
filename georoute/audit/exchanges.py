"""The log of exchanges, played backwards from the finished tours.

A leg is taken without its direction: where travel is the same both ways the log may name a leg
either way round.
"""

from __future__ import annotations

import math
from collections import Counter, defaultdict
from itertools import pairwise
from typing import TYPE_CHECKING

from georoute.audit.report import LENGTH_M, MONEY, RELATIVE, TIME_S, close
from georoute.audit.tours import travel_cost

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from georoute.audit.remeasure import Ruler
    from georoute.audit.report import Report
    from georoute.domain.plan import Exchange, Plan

__all__ = ["check_exchanges"]

KINDS = frozenset(
    {"start", "order", "two_opt", "or_opt", "or_3opt", "lin_kernighan", "kick", "relocate"}
)

Leg = tuple[str, str]


def _undirected(legs: Iterable[Leg]) -> Counter[Leg]:
    return Counter((min(leg), max(leg)) for leg in legs)


def _where(entry: Exchange) -> str:
    return f"Tour {entry.tour_id}, exchange {entry.step} ({entry.kind})"


def _price(plan: Plan, ruler: Ruler, legs: Iterable[Leg]) -> float | None:
    """Return the travel cost of legs; ``None`` where one cannot be measured."""
    figures = [ruler.leg(from_id, to_id) for from_id, to_id in legs]
    known = [pair for pair in figures if pair is not None]
    if len(known) != len(figures):
        return None
    drive_s, dist_m = sum(s for s, _ in known), sum(m for _, m in known)
    price = travel_cost(plan.programme, drive_s=drive_s, dist_m=dist_m)
    return price if math.isfinite(price) else None


def _check_entry(plan: Plan, entry: Exchange, ruler: Ruler, report: Report) -> None:
    """Check that the cost changed by what the legs cost, measured again."""
    if entry.kind not in KINDS:
        report.fault(
            "exchange_kind",
            _where(entry),
            expected=f"one of {', '.join(sorted(KINDS))}",
            got=entry.kind,
            subject=entry.tour_id,
        )
    out, into = _price(plan, ruler, entry.legs_out), _price(plan, ruler, entry.legs_in)
    if out is None or into is None:
        return
    # The planner prices legs rounded to whole milliseconds and millimetres.
    legs = len(entry.legs_out) + len(entry.legs_in)
    rounding = legs * travel_cost(plan.programme, drive_s=TIME_S, dist_m=LENGTH_M)
    report.figure(
        "exchange_gain",
        f"{_where(entry)}: change of the cost",
        expected=into - out,
        got=entry.cost_after - entry.cost_before,
        tolerance=2 * MONEY + RELATIVE * (out + into) + rounding,
        subject=entry.tour_id,
    )


def _check_chain(entries: Sequence[Exchange], report: Report) -> None:
    for number, entry in enumerate(entries, 1):
        if entry.step != number:
            report.fault(
                "exchange_step",
                f"{_where(entry)}: step",
                expected=number,
                got=entry.step,
                subject=entry.tour_id,
            )
    for earlier, entry in pairwise(entries):
        if not close(earlier.cost_after, entry.cost_before, MONEY):
            report.fault(
                "exchange_chain",
                f"{_where(entry)}: cost before",
                expected=earlier.cost_after,
                got=entry.cost_before,
                subject=entry.tour_id,
            )


def _check_replay(entries: Sequence[Exchange], legs: Counter[Leg], report: Report) -> None:
    """Undo the exchanges from the last one on; each leg that came must be there to go."""
    legs = legs.copy()
    for entry in reversed(entries):
        came = _undirected(entry.legs_in)
        missing = came - legs
        if missing:
            report.fault(
                "exchange_legs",
                f"{_where(entry)}: legs in",
                expected="legs of the tour after the exchange",
                got=", ".join(f"{a} → {b}" for a, b in sorted(missing)),
                subject=entry.tour_id,
            )
            return
        legs = legs - came + _undirected(entry.legs_out)


def check_exchanges(plan: Plan, ruler: Ruler, report: Report) -> None:
    """Check every tour's log: steps, costs in a chain, and legs that lead to the tour."""
    logs: dict[str, list[Exchange]] = defaultdict(list)
    for entry in plan.exchanges:
        logs[entry.tour_id].append(entry)
        _check_entry(plan, entry, ruler, report)
    tours = {tour.tour_id: tour for tour in plan.tours}
    for tour_id, entries in logs.items():
        _check_chain(entries, report)
        tour = tours.get(tour_id)
        driven = [] if tour is None else [(leg.from_id, leg.to_id) for leg in tour.legs]
        _check_replay(entries, _undirected(driven), report)
        drive_s, dist_m = (0.0, 0.0) if tour is None else (tour.drive_s, tour.dist_m)
        report.figure(
            "exchange_end",
            f"{_where(entries[-1])}: cost after the last exchange",
            expected=travel_cost(plan.programme, drive_s=drive_s, dist_m=dist_m),
            got=entries[-1].cost_after,
            tolerance=2 * MONEY,
            subject=tour_id,
        )
