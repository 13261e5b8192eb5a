"""Change any one field of a tour, stop or leg of a sound plan: the audit must notice."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from datetime import datetime, timedelta

from hypothesis import given
from hypothesis import strategies as st

from georoute.audit import audit
from georoute.domain.plan import DayTour, Leg, Plan, Stop
from tests.store_breaches import leg, stop, tour
from tests.store_clock import after
from tests.store_helpers import example_plan

SOUND = example_plan()


@dataclass(frozen=True)
class Spot:
    """A field of a tour, of one of its stops or of one of its legs."""

    t: int
    kind: type
    k: int
    name: str

    @property
    def value(self) -> object:
        owner: object = SOUND.tours[self.t]
        if self.kind is Stop:
            owner = SOUND.tours[self.t].stops[self.k]
        elif self.kind is Leg:
            owner = SOUND.tours[self.t].legs[self.k]
        return getattr(owner, self.name)

    def put(self, value: object) -> Plan:
        if self.kind is Stop:
            return stop(SOUND, self.t, self.k, **{self.name: value})
        if self.kind is Leg:
            return leg(SOUND, self.t, self.k, **{self.name: value})
        return tour(SOUND, self.t, **{self.name: value})


def _spots() -> Iterator[Spot]:
    for t, found in enumerate(SOUND.tours):
        for item in fields(DayTour):
            if item.name not in {"stops", "legs", "bound"}:
                yield Spot(t, DayTour, 0, item.name)
        for kind, many in ((Stop, found.stops), (Leg, found.legs)):
            for k in range(len(many)):
                for item in fields(kind):
                    yield Spot(t, kind, k, item.name)


SPOTS = list(_spots())


@st.composite
def mutants(draw: st.DrawFn) -> tuple[Spot, object]:
    """A field and another value of its type, never so near that the tolerances cover it."""
    spot = draw(st.sampled_from(SPOTS))
    old = spot.value
    if isinstance(old, str):
        ids = [site.site_id for site in SOUND.sites] + ["north", "south", "anna", "bo", "x"]
        return spot, draw(st.sampled_from([name for name in ids if name != old]))
    if isinstance(old, tuple):
        return spot, ((-29.95, -71.34),) if spot.name == "path" else (("Calle Larga", 12.5),)
    step = draw(st.floats(0.5, 1e5)) * draw(st.sampled_from([-1, 1]))
    if isinstance(old, datetime):
        return spot, after(old, step)
    if isinstance(old, float):
        return spot, old + step
    if isinstance(old, int):
        return spot, old + draw(st.integers(1, 9))
    days = draw(st.integers(1, 400)) * draw(st.sampled_from([-1, 1]))
    return spot, old + timedelta(days=days)  # type: ignore[operator]  # a date is what is left


def test_the_plan_is_sound_to_begin_with() -> None:
    assert audit(SOUND) == ()


@given(mutants())
def test_any_changed_field_of_a_tour_is_noticed(mutant: tuple[Spot, object]) -> None:
    spot, value = mutant
    findings = audit(spot.put(value))
    assert any(finding.is_fault for finding in findings), (spot, value)


@given(st.data())
def test_any_visit_dropped_or_swapped_is_noticed(data: st.DataObject) -> None:
    stops = [(t, k) for t, found in enumerate(SOUND.tours) for k in range(len(found.stops))]
    t, k = data.draw(st.sampled_from(stops))
    kept = SOUND.tours[t].stops
    if data.draw(st.booleans()):
        changed = tour(SOUND, t, stops=(*kept[:k], *kept[k + 1 :]))
    else:
        u, j = data.draw(st.sampled_from([pair for pair in stops if pair != (t, k)]))
        other = SOUND.tours[u].stops[j]
        changed = stop(SOUND, t, k, visit_id=other.visit_id, site_id=other.site_id)
    assert any(finding.is_fault for finding in audit(changed))


@given(st.sampled_from(SOUND.visits), st.floats(1, 7200), st.sampled_from(["work_s", "access_s"]))
def test_visit_of_another_length_is_noticed(visit: object, more: float, name: str) -> None:
    visits = tuple(
        replace(v, **{name: getattr(v, name) + more}) if v is visit else v for v in SOUND.visits
    )
    assert any(finding.is_fault for finding in audit(replace(SOUND, visits=visits)))
