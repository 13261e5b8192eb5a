"""A plan in a few figures: for the terminal and as JSON."""

from __future__ import annotations

from typing import TYPE_CHECKING

from rich.text import Text

from georoute.cli.render import clock_span, counted, hours, kilometres, money, new_table, stdout
from georoute.domain.cautions import CAUTIONS
from georoute.domain.run import Aim

if TYPE_CHECKING:
    from georoute.domain.plan import Capacity, DayTour, Plan, Stop, Unplaced

__all__ = ["as_json", "capacity_line", "print_plan", "print_tour", "print_unplaced"]

WORST_SHOWN = 10
AIM_WORDS = {
    Aim.LEAST_COST: "the least cost",
    Aim.FEWEST_DAYS: "the fewest days, then the least cost",
}


def capacity_line(capacity: Capacity) -> str:
    """Say the capacity sum in words: work and least travel against the hours of the shifts."""
    need = capacity.work_h + capacity.least_travel_h
    line = (
        f"Capacity: {counted(capacity.visits, 'visit')} with {capacity.work_h:.1f} h of work and "
        f"at least {capacity.least_travel_h:.1f} h of travel ({need:.1f} h); "
        f"{counted(capacity.shifts, 'shift')} with {capacity.shift_h:.1f} h, "
        f"and {capacity.overtime_h:.1f} h of overtime."
    )
    if capacity.short_h > 0:
        line += (
            f" At least {capacity.short_h:.1f} h are missing: whatever the order, some visits "
            "cannot be placed."
        )
    return line


def _travel_line(plan: Plan) -> str:
    if not plan.travel.estimated:
        return f"Travel: {plan.travel.source}."
    line = f"Travel is estimated, not measured along roads: {plan.travel.source}."
    low, high = plan.travel.low_factor, plan.travel.high_factor
    if (low, high) != (1.0, 1.0):
        line += f" A leg may take {low:.2f} to {high:.2f} times the time shown."
    return line


def _stage_line(plan: Plan) -> str:
    currency = plan.programme.tariff.currency
    told = (
        f"after {stage.stage} {money(stage.cost, currency)} ({stage.placed} placed)"
        for stage in plan.stages
    )
    note = " The first two may still break limits." if len(plan.stages) > 1 else ""
    return "Cost " + ", ".join(told) + "." + note


def _balance_line(plan: Plan) -> str:
    """Say who is out on how many days and for how long, from departure to the write-up's end."""
    told = []
    for person in plan.programme.inspectors:
        own = [tour for tour in plan.tours if tour.inspector_id == person.inspector_id]
        out = sum((tour.finish - tour.depart).total_seconds() for tour in own)
        told.append(f"{person.name} {hours(out)} on {counted(len(own), 'day')}")
    return "Hours out: " + ", ".join(told) + "."


def print_unplaced(unplaced: tuple[Unplaced, ...], *, most: int | None = None) -> None:
    """Print the visits that are not in the plan, each with its reason; ``most`` at the most."""
    console = stdout()
    if not unplaced:
        console.print("Every visit is placed.")
        return
    console.print(Text(f"Not placed: {counted(len(unplaced), 'visit')}", style="bold"))
    for item in unplaced[:most]:
        console.print(Text(f"  {item.site_id}: {item.message}  [{item.code.value}]"))
    if most is not None and len(unplaced) > most:
        console.print(f"  … and {len(unplaced) - most} more: georoute show PLAN --unplaced")


def print_plan(plan: Plan, *, capacity: bool = True) -> None:
    """Print a plan: what is not placed first, then a line for each tour, then the sums."""
    console = stdout()
    currency = plan.programme.tariff.currency
    names = {person.inspector_id: person.name for person in plan.programme.inspectors}
    console.print(Text(plan.programme.title, style="bold"))
    if capacity:
        console.print(Text(capacity_line(plan.capacity)))
    print_unplaced(plan.unplaced, most=WORST_SHOWN)
    figures = ("stops", "drive", "work", "wait", "over", "km", "cost")
    table = new_table("date", "out-back", *figures, "inspector", right=figures)
    for tour in plan.tours:
        table.add_row(
            f"{tour.day:%a} {tour.day.isoformat()}",
            f"{tour.depart:%H:%M}-{tour.back:%H:%M}",
            str(len(tour.stops)),
            clock_span(tour.drive_s),
            clock_span(tour.work_s),
            clock_span(tour.wait_s),
            clock_span(tour.overtime_s),
            f"{tour.dist_m / 1000:.1f}",
            f"{tour.cost:,.0f}",
            Text(names[tour.inspector_id]),
        )
    console.print(table)
    stops = sum(len(tour.stops) for tour in plan.tours)
    console.print(
        f"{counted(len(plan.tours), 'tour')}, {counted(stops, 'stop')}, "
        f"{hours(sum(tour.drive_s for tour in plan.tours))} of driving, "
        f"{kilometres(sum(tour.dist_m for tour in plan.tours))}, {money(plan.cost, currency)}."
    )
    console.print(Text(_stage_line(plan)))
    console.print(Text(_travel_line(plan)))
    console.print(Text(_balance_line(plan)))
    console.print(
        f"Searched for {AIM_WORDS[plan.programme.aim]}; it ended because: "
        f"{plan.provenance.stop_rule.value}. No bound yet."
    )


def _stop_row(plan: Plan, stop: Stop, leg_min: float) -> tuple[str | Text, ...]:
    sites = {site.site_id: site for site in plan.sites}
    visits = {visit.visit_id: visit for visit in plan.visits}
    site, visit = sites[stop.site_id], visits[stop.visit_id]
    return (
        str(stop.order),
        f"{leg_min:.0f}",
        f"{stop.arrive:%H:%M}",
        f"{stop.latest_arrive:%H:%M}",
        f"{(visit.access_s + visit.work_s) / 60:.0f}",
        f"{stop.leave:%H:%M}",
        Text(site.site_id),
        Text(" - ".join(part for part in (site.name, site.address) if part)),
    )


def print_tour(plan: Plan, tour: DayTour) -> None:
    """Print one tour stop by stop."""
    console = stdout()
    bases = {base.base_id: base.name or base.base_id for base in plan.programme.bases}
    names = {person.inspector_id: person.name for person in plan.programme.inspectors}
    console.print(
        Text(f"{tour.day:%A} {tour.day.isoformat()}, {names[tour.inspector_id]}", style="bold")
    )
    console.print(
        f"leaves {bases[tour.start_base_id]} {tour.depart:%H:%M}, back at "
        f"{bases[tour.end_base_id]} {tour.back:%H:%M}, finished {tour.finish:%H:%M}"
    )
    figures = ("no.", "drive min", "arrive", "latest", "on site min", "leave")
    table = new_table(*figures, "site", "name and address", right=figures)
    for stop, leg in zip(tour.stops, tour.legs, strict=False):
        table.add_row(*_stop_row(plan, stop, leg.drive_s / 60))
    home = (f"{tour.legs[-1].drive_s / 60:.0f}", f"{tour.back:%H:%M}")
    table.add_row("", *home, "", "", "", "", Text(f"back at {bases[tour.end_base_id]}"))
    console.print(table)


def _tour_json(tour: DayTour) -> dict[str, object]:
    return {
        "tour_id": tour.tour_id,
        "inspector_id": tour.inspector_id,
        "date": tour.day.isoformat(),
        "depart": tour.depart.isoformat(),
        "back": tour.back.isoformat(),
        "finish": tour.finish.isoformat(),
        "drive_s": tour.drive_s,
        "work_s": tour.work_s,
        "wait_s": tour.wait_s,
        "overtime_s": tour.overtime_s,
        "dist_m": tour.dist_m,
        "cost": tour.cost,
        "stops": [
            {
                "order": stop.order,
                "visit_id": stop.visit_id,
                "site_id": stop.site_id,
                "arrive": stop.arrive.isoformat(),
                "start": stop.start.isoformat(),
                "leave": stop.leave.isoformat(),
                "latest_arrive": stop.latest_arrive.isoformat(),
            }
            for stop in tour.stops
        ],
    }


def as_json(plan: Plan) -> dict[str, object]:
    """Return the plan as plain values: ISO 8601 times, units in the names."""
    return {
        "plan_id": plan.plan_id,
        "title": plan.programme.title,
        "currency": plan.programme.tariff.currency,
        "cost": plan.cost,
        "visits": len(plan.visits),
        "placed": sum(len(tour.stops) for tour in plan.tours),
        "capacity": {
            "visits": plan.capacity.visits,
            "shifts": plan.capacity.shifts,
            "work_h": plan.capacity.work_h,
            "least_travel_h": plan.capacity.least_travel_h,
            "shift_h": plan.capacity.shift_h,
            "overtime_h": plan.capacity.overtime_h,
            "short_h": plan.capacity.short_h,
        },
        "travel": {
            "source": plan.travel.source,
            "estimated": plan.travel.estimated,
            "low_factor": plan.travel.low_factor,
            "high_factor": plan.travel.high_factor,
        },
        "stages": [
            {"stage": stage.stage, "cost": stage.cost, "placed": stage.placed}
            for stage in plan.stages
        ],
        "aim": plan.programme.aim.value,
        "stop_rule": plan.provenance.stop_rule.value,
        "tours": [_tour_json(tour) for tour in plan.tours],
        "unplaced": [
            {
                "visit_id": item.visit_id,
                "site_id": item.site_id,
                "reason": item.code.value,
                "message": item.message,
                "figures": dict(item.figures),
            }
            for item in plan.unplaced
        ],
        "cautions": list(CAUTIONS),
    }
