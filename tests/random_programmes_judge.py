"""Read, plan and judge the programme of one seed."""

from __future__ import annotations

import traceback
import warnings
from dataclasses import dataclass
from pathlib import Path

import georoute
from georoute.audit import audit
from georoute.domain.plan import Plan
from georoute.domain.programme import Programme
from georoute.domain.run import Aim
from georoute.domain.sites import Register
from georoute.errors import AuditError
from georoute.pipeline import prepare
from georoute.problem import MICRO, Problem
from tests.random_programmes_brute import Objective, best_plan, loss_of
from tests.random_programmes_draw import MOST_SHIFTS, MOST_VISITS, draw_files, enriched

__all__ = ["EQUAL", "Verdict", "judge", "objective_of", "read"]

EQUAL, WORSE, BETTER = "equal", "worse", "better"
ROUNDING = 1
"""Micro-units by which the money of a tour may differ: it is rounded once a tour."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Verdict:
    """What became of one seed.

    ``trouble``: nothing, ``violation``, ``warning`` (of Python or a library) or ``traceback``.
    ``beside_brute``: nothing where it was not asked for, else ``equal``, ``worse`` or ``better``.
    """

    seed: int
    visits: int = 0
    shifts: int = 0
    placed: int = 0
    trouble: str = ""
    beside_brute: str = ""
    text: str = ""


def read(seed: int, folder: Path, *, effort: str) -> tuple[Programme, Register]:
    """Draw the files of a seed, and read them as a user's files are read."""
    drawn = draw_files(seed, folder, effort=effort)
    programme = georoute.read_programme(drawn.programme)
    register, _ = georoute.read_register(programme.register.path, programme=programme)
    return programme, enriched(drawn, programme, register)


def objective_of(plan: Plan, problem: Problem) -> Objective:
    """Return what a plan leaves out and costs."""
    left_out = {entry.visit_id for entry in plan.unplaced}
    indices = {v for v, visit in enumerate(plan.visits) if visit.visit_id in left_out}
    days = (len(plan.tours),) if plan.programme.aim is Aim.FEWEST_DAYS else ()
    money = sum(round(tour.cost * MICRO) for tour in plan.tours)
    return loss_of(problem, indices) + days, money


def _beside_brute(plan: Plan, programme: Programme, register: Register) -> tuple[str, str]:
    problem = prepare(programme, register).packed.problem
    own, best = (
        objective_of(plan, problem),
        best_plan(problem, fewest_days=programme.aim is Aim.FEWEST_DAYS),
    )
    slack = ROUNDING * problem.shift_count
    if own[0] == best[0] and abs(own[1] - best[1]) <= slack:
        return EQUAL, ""
    return (WORSE if own > best else BETTER), f"{own} against {best} by brute force"


def _breaches(plan: Plan, folder: Path, *, round_trip: bool) -> list[str]:
    found = [finding.message for finding in audit(plan) if finding.is_fault]
    everything = [stop.visit_id for tour in plan.tours for stop in tour.stops]
    everything += [entry.visit_id for entry in plan.unplaced]
    if sorted(everything) != sorted(visit.visit_id for visit in plan.visits):
        found.append("visits are lost or in the plan twice")
    if round_trip:
        georoute.write_plan(plan, folder / "plan.gpkg")
        if georoute.read_plan(folder / "plan.gpkg") != plan:
            found.append("the plan file gives back another plan")
    return found


def _judged(seed: int, folder: Path, effort: str, *, brute: bool, round_trip: bool) -> Verdict:
    programme, register = read(seed, folder, effort=effort)
    shifts = len(programme.shifts())
    assert len(register.visits) <= MOST_VISITS
    assert shifts <= MOST_SHIFTS
    with warnings.catch_warnings(record=True) as warned:
        warnings.simplefilter("always")
        plan = georoute.plan(programme, register)
        breaches = _breaches(plan, folder, round_trip=round_trip)
    remarks = [f"{w.filename}:{w.lineno}: {w.message}" for w in warned]
    beside, text = _beside_brute(plan, programme, register) if brute else ("", "")
    return Verdict(
        seed=seed,
        visits=len(register.visits),
        shifts=shifts,
        placed=sum(len(tour.stops) for tour in plan.tours),
        trouble="violation" if breaches else "warning" if remarks else "",
        beside_brute=beside,
        text="; ".join([*breaches, *remarks, text]).strip("; "),
    )


def judge(seed: int, folder: Path, *, effort: str, brute: bool, round_trip: bool) -> Verdict:
    """Plan the programme of a seed; a breach or an error of any kind is part of the verdict."""
    try:
        return _judged(seed, folder, effort, brute=brute, round_trip=round_trip)
    except AuditError as error:
        told = "; ".join(finding.message for finding in error.findings)
        return Verdict(seed=seed, trouble="violation", text=told or str(error))
    except Exception:  # noqa: BLE001 - any error is what is looked for
        return Verdict(seed=seed, trouble="traceback", text=traceback.format_exc())
