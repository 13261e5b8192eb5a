"""From a programme and a checked register to an audited plan."""

from __future__ import annotations

import uuid
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from georoute import __version__
from georoute.audit import audit
from georoute.domain.costs import Places
from georoute.domain.plan import Plan, Provenance, StageCost, TravelNote, Unplaced
from georoute.domain.run import never_stop, no_progress
from georoute.errors import AuditError, InputError
from georoute.measure import measure
from georoute.pipeline.budget import Budget
from georoute.pipeline.search import search
from georoute.pipeline.warm_up import warm_up
from georoute.problem import pack
from georoute.problem.capacity import capacity
from georoute.problem.reasons import explain_unplaced, reason_text
from georoute.timetable import tours_of

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping, Sequence
    from datetime import datetime

    from georoute.domain.costs import CostMatrix
    from georoute.domain.findings import Finding
    from georoute.domain.plan import Capacity, DayTour, Exchange, ReasonCode
    from georoute.domain.programme import Programme
    from georoute.domain.roads import BackdropLine
    from georoute.domain.run import Progress, ShouldStop
    from georoute.domain.sites import Base, Register, Site
    from georoute.pipeline.search import Found
    from georoute.problem import Packed

__all__ = ["Prepared", "compile_search", "make_plan", "plan", "prepare"]

PLAN_NAMESPACE = uuid.UUID("6d1c7a52-4c0e-5a53-9d0b-0b5f5f0c7a11")
"""A plan's id is the UUIDv5 of its inputs in this namespace: a rerun gives the same id."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Prepared:
    """Everything that is known before the search: travel, arrays, and what the sums say.

    ``findings`` are the warnings and notes that came up while measuring travel.
    """

    packed: Packed
    register: Register
    costs: CostMatrix
    capacity: Capacity
    findings: tuple[Finding, ...]


def _places(programme: Programme, register: Register) -> Places:
    """Bases first, then the sites in the order of the register."""
    base_ids = [base.base_id for base in programme.bases]
    clash = sorted(set(base_ids) & {site.site_id for site in register.sites})
    if clash:
        msg = (
            f"The register and the programme both use the id {clash[0]!r}, for a site and for a "
            "base. Rename the base in the programme file."
        )
        raise InputError(msg)
    spots: list[Base | Site] = [*programme.bases, *register.sites]
    return Places(
        ids=(*base_ids, *(site.site_id for site in register.sites)),
        lat_deg=np.array([spot.lat_deg for spot in spots], np.float64),
        lon_deg=np.array([spot.lon_deg for spot in spots], np.float64),
    )


def _plan_id(programme: Programme, register: Register) -> str:
    identity = "|".join(
        (
            register.sha256,
            programme.sha256,
            str(programme.seed),
            programme.aim.value,
            programme.effort.name,
            str(programme.effort.seconds),
        )
    )
    return str(uuid.uuid5(PLAN_NAMESPACE, identity))


def _left_out(
    packed: Packed, reasons: Iterable[tuple[int, ReasonCode, Mapping[str, float]]]
) -> tuple[Unplaced, ...]:
    return tuple(
        Unplaced(
            visit_id=packed.visits[v].visit_id,
            site_id=packed.visits[v].site_id,
            code=code,
            message=reason_text(code, figures),
            figures=figures,
        )
        for v, code, figures in reasons
    )


def _exchanges(found: Found) -> tuple[Exchange, ...]:
    return tuple(
        entry for shift in range(len(found.solution.orders)) for entry in found.log.entries(shift)
    )


def _assemble(prepared: Prepared, found: Found, *, budget: Budget, issued: datetime | None) -> Plan:
    packed, register, costs = prepared.packed, prepared.register, prepared.costs
    programme = packed.programme
    tours = tours_of(packed, found.solution)
    reasons = explain_unplaced(packed.problem, found.solution, why_not=packed.why_not)
    return Plan(
        plan_id=_plan_id(programme, register),
        programme=programme,
        sites=register.sites,
        visits=register.visits,
        tours=tours,
        unplaced=_left_out(packed, reasons),
        capacity=prepared.capacity,
        travel=TravelNote(
            source=costs.source,
            estimated=costs.estimated,
            low_factor=costs.low_factor,
            high_factor=costs.high_factor,
            network="" if costs.ways is None else costs.ways.network,
            credit="" if costs.ways is None else costs.ways.credit,
        ),
        stages=tuple(
            StageCost(stage=stage, cost=cost, placed=placed) for stage, cost, placed in found.stages
        ),
        exchanges=_exchanges(found),
        provenance=Provenance(
            version=__version__,
            register_source=register.source,
            register_sha256=register.sha256,
            programme_sha256=programme.sha256,
            seed=programme.seed,
            effort=programme.effort.name,
            seconds=programme.effort.seconds,
            stop_rule=budget.stop_rule,
            issued=issued,
        ),
        extra_columns=register.extra_columns,
        road_points=() if costs.ways is None else costs.ways.points(),
        backdrop=_backdrop(costs, tours),
    )


def _backdrop(costs: CostMatrix, tours: Iterable[DayTour]) -> tuple[BackdropLine, ...]:
    ways = [leg.path for tour in tours for leg in tour.legs if leg.path]
    return costs.ways.backdrop(ways) if costs.ways is not None and ways else ()


def _check(plan: Plan) -> None:
    breaches: Sequence[Finding] = [finding for finding in audit(plan) if finding.is_fault]
    if breaches:
        msg = (
            f"The finished plan failed its own check in {len(breaches)} place(s); it was not "
            f"written. First: {breaches[0].message}"
        )
        raise AuditError(msg, findings=breaches)


def prepare(
    programme: Programme, register: Register, *, progress: Progress = no_progress
) -> Prepared:
    """Measure travel, pack the arrays, and do the sums that come before any search.

    Raises
    ------
    InputError
        A base and a site share an id.
    TableError
        The user's own travel table has faults.
    """
    progress("measure", fraction=0.0)
    places = _places(programme, register)
    costs, findings = measure(places, programme.travel, progress=progress)
    packed = pack(programme, register.visits, places, costs)
    return Prepared(
        packed=packed,
        register=register,
        costs=costs,
        capacity=capacity(packed.problem),
        findings=findings,
    )


def compile_search(prepared: Prepared, *, progress: Progress = no_progress) -> None:
    """Compile the kernels of the search, once for each machine and version.

    A search compiles what it needs anyway; done beforehand, a limit in seconds does not pay for
    it.
    """
    progress("compile", fraction=0.0)
    warm_up(prepared.packed.problem, prepared.packed.programme.effort)


def make_plan(
    prepared: Prepared,
    *,
    progress: Progress = no_progress,
    should_stop: ShouldStop = never_stop,
    issued: datetime | None = None,
) -> Plan:
    """Search, put clock times to what was found, and check it with the audit.

    ``issued`` is told on the pages and does not belong to the plan's identity. When
    ``should_stop`` turns true the search ends with the best plan found so far.

    Raises
    ------
    AuditError
        The finished plan broke one of its own rules (a defect of the program, never of the input).
    """
    programme = prepared.packed.programme
    budget = Budget(should_stop, seconds=programme.effort.seconds)
    found = search(
        prepared.packed,
        effort=programme.effort,
        seed=programme.seed,
        progress=progress,
        budget=budget,
    )
    finished = _assemble(prepared, found, budget=budget, issued=issued)
    progress("check", fraction=0.0)
    _check(finished)
    return finished


def plan(
    programme: Programme,
    register: Register,
    *,
    progress: Progress = no_progress,
    should_stop: ShouldStop = never_stop,
    issued: datetime | None = None,
) -> Plan:
    """Plan a register: days, inspectors, order and clock times, checked by the audit.

    Parameters
    ----------
    programme
        All settings of the run, from ``read_programme``.
    register
        The checked register, from ``read_register``.
    progress
        Called often with the stage at hand, its fraction done and the cost so far.
    should_stop
        Asked often; once it is true the search ends with the best plan found so far.
    issued
        When the plan is issued; told on the pages, no part of the plan's identity.

    Returns
    -------
    Plan
        Every visit is in a tour or in ``unplaced`` with its reason.

    Raises
    ------
    InputError
        A base and a site share an id.
    TableError
        The user's own travel table has faults.
    AuditError
        The finished plan broke one of its own rules (a defect of the program, never of the input).
    """
    prepared = prepare(programme, register, progress=progress)
    compile_search(prepared, progress=progress)
    return make_plan(prepared, progress=progress, should_stop=should_stop, issued=issued)
