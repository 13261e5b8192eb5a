"""The audit: a finished plan checked from the raw inputs that it holds.

It shares no code with what makes plans: calendars, clock, distances and money are worked out
here a second time, in plain Python, so that a mistake there cannot hide here.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

from georoute.audit.coverage import check_coverage, check_ids
from georoute.audit.exchanges import check_exchanges
from georoute.audit.remeasure import Ruler
from georoute.audit.report import Report
from georoute.audit.totals import check_totals
from georoute.audit.tours import check_tours
from georoute.audit.ways import check_ways

if TYPE_CHECKING:
    from georoute.domain.findings import Finding
    from georoute.domain.plan import Plan

__all__ = ["audit"]


def audit(plan: Plan) -> tuple[Finding, ...]:
    """Check a finished plan and return every breach found; nothing means it is sound.

    Checked are: ids; that every visit is once in a tour or among the unplaced; inspector, date,
    bases, opening times, eligibility and load of every tour; every clock time; every leg measured
    again (within 5 ms and 5 mm plus 3e-6 of the leg); sums, overtime and money (within 0.001 of
    the currency); latest arrivals; capacity, stages and the log of exchanges. Legs along roads
    are measured again on the network that is kept, and their ways for themselves.

    Parameters
    ----------
    plan
        The plan, with the programme, sites and visits it was made from.

    Returns
    -------
    tuple of Finding
        Faults for breaches; a warning where the user's own travel table, or the road network, is
        no longer at hand.
    """
    report = Report()
    check_ids(plan, report)
    check_coverage(plan, report)
    ruler = Ruler(plan, report)
    check_tours(plan, ruler, report)
    check_exchanges(plan, ruler, report)
    check_ways(plan, report)
    check_totals(plan, report)
    return report.findings
