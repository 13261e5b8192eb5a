"""What the office page says about a whole plan, ready to show."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.publishing.office_parts import OfficeParts
from georoute.publishing.office_tables import OfficeTables
from georoute.publishing.quality import cost_parts, hours_spent

if TYPE_CHECKING:
    from georoute.publishing.office_tables import Section
    from georoute.publishing.page_values import Edition

__all__ = ["OfficeView", "office_view"]


@dataclass(frozen=True, slots=True, kw_only=True)
class OfficeView:
    """The office page: totals as pairs of a word and a figure, then its sections in order."""

    title: str
    placement: str
    unplaced: bool
    totals: tuple[tuple[str, str], ...]
    sections: tuple[Section, ...]
    origin: tuple[tuple[str, str], ...]


def _totals(edition: Edition) -> tuple[tuple[str, str], ...]:
    plan, figures = edition.plan, edition.figures
    words, marked, hours = figures.words, figures.marked, figures.duration
    spent = hours_spent(plan)
    overtime_s = sum(tour.overtime_s for tour in plan.tours)
    moving = spent.drive_s + spent.work_s + spent.access_s
    rows = (
        ("tours", str(len(plan.tours))),
        ("stops", str(sum(len(tour.stops) for tour in plan.tours))),
        ("work", hours(spent.work_s + spent.access_s)),
        ("drive", figures.drive(spent.drive_s)),
        ("travel_share", marked(figures.share(spent.drive_s, moving))),
        ("wait", marked(hours(spent.wait_s))),
        ("overtime", marked(hours(overtime_s))),
        ("distance", figures.length(sum(tour.dist_m for tour in plan.tours))),
        ("cost", figures.money(sum(part.amount for part in cost_parts(plan)))),
    )
    return tuple((words(key), text) for key, text in rows)


def _placement(edition: Edition) -> str:
    words, plan = edition.figures.words, edition.plan
    visits, left = len(plan.visits), len(plan.unplaced)
    if left:
        return words("unplaced_count", count=left, visits=visits)
    return words("all_placed", visits=visits)


def _origin(edition: Edition) -> tuple[tuple[str, str], ...]:
    """Return where the plan comes from, in full: enough to make it again."""
    words, made = edition.figures.words, edition.plan.provenance
    seconds = edition.figures.number(made.seconds, 1) if made.seconds is not None else ""
    issue = f"{words('revision', revision=made.revision)}, {edition.figures.issued(edition.issued)}"
    rows = [
        ("origin_plan", edition.plan.plan_id),
        ("origin_issue", issue),
        ("origin_version", made.version),
        ("origin_register", edition.register_name()),
        ("origin_register_hash", made.register_sha256),
        ("origin_programme_hash", made.programme_sha256),
        ("origin_seed", str(made.seed)),
        ("origin_effort", made.effort),
        ("origin_seconds", seconds or words("no_limit")),
        ("origin_stop_rule", words(f"stop_rule_{made.stop_rule.name.lower()}")),
        ("origin_travel", edition.plan.travel.source),
    ]
    return tuple((words(key), text) for key, text in rows)


def office_view(edition: Edition) -> OfficeView:
    """Return what the office page of an edition says."""
    plan, figures = edition.plan, edition.figures
    tables, parts = OfficeTables(edition), OfficeParts(edition)
    return OfficeView(
        title=figures.words(
            "overview_title",
            first=figures.date_long(plan.programme.first_date),
            last=figures.date_long(plan.programme.last_date),
        ),
        placement=_placement(edition),
        unplaced=bool(plan.unplaced),
        totals=_totals(edition),
        sections=(
            *([tables.left()] if plan.unplaced else []),
            parts.weeks(),
            tables.dates(),
            parts.cost(),
            parts.stages(),
            parts.spent(),
            parts.balance(),
            tables.shape(),
            tables.changes(),
        ),
        origin=_origin(edition),
    )
