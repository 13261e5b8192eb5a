"""What every page of one publishing shares: the plan, its words and figures, and its imprint."""

from __future__ import annotations

import re
from dataclasses import dataclass
from typing import TYPE_CHECKING

from georoute.publishing.day_view import PlanIndex
from georoute.publishing.driving_side import drives_on_left
from georoute.publishing.figures import Figures
from georoute.publishing.ground import Ground
from georoute.publishing.leg_paths import any_roads
from georoute.publishing.names import slugs_of
from georoute.publishing.words import words_for

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence
    from datetime import datetime

    from georoute.domain.plan import DayTour, Plan

__all__ = ["Edition", "near_lon"]

_SHORT_HASH = 12


def near_lon(lon_deg: float, reference_deg: float) -> float:
    """Return a longitude within half a turn of a reference, so that no map spans the globe."""
    return lon_deg - 360.0 * round((lon_deg - reference_deg) / 360.0)


@dataclass(frozen=True, slots=True, kw_only=True)
class Edition:
    """One publishing of one plan in one language; ``ground`` only where legs follow roads."""

    plan: Plan
    figures: Figures
    index: PlanIndex
    slugs: Mapping[str, str]
    issued: datetime | None
    ground: Ground | None

    @classmethod
    def of(cls, plan: Plan, *, issued: datetime | None, language: str) -> Edition:
        """Prepare ``plan`` for publishing.

        Raises
        ------
        ValueError
            There is no catalogue for the language.
        """
        return cls(
            plan=plan,
            figures=Figures.of(plan, words_for(language)),
            index=PlanIndex.of(plan),
            slugs=slugs_of(person.inspector_id for person in plan.programme.inspectors),
            issued=issued or plan.provenance.issued,
            ground=Ground.of(plan) if any(any_roads(t.legs) for t in plan.tours) else None,
        )

    def lon(self, lon_deg: float) -> float:
        """Return a longitude on the same side of the date line as the first base."""
        return round(near_lon(lon_deg, self.plan.programme.bases[0].lon_deg), 6)

    def side(self) -> int:
        """Return on which side of a way a cord lies: 1 for the right, -1 for the left."""
        return -1 if drives_on_left(self.plan.programme.zone) else 1

    def travel_note(self) -> str:
        """Return what the travel figures are, and their interval."""
        words, travel = self.figures.words, self.plan.travel
        if not travel.estimated:
            return words("measured_note", source=travel.source)
        keys = ("estimated_no_interval", "estimated_note")
        if self.ground is not None:
            keys = ("roads_estimated_no_interval", "roads_estimated_note")
        if travel.low_factor == travel.high_factor:
            return words(keys[0], source=travel.source)
        low = self.figures.number(travel.low_factor, 2)
        high = self.figures.number(travel.high_factor, 2)
        return words(keys[1], source=travel.source, low=low, high=high)

    def map_note(self, tours: Sequence[DayTour]) -> str:
        """Return what the cords of some tours are: along roads, straight, or some of each."""
        words, estimated = self.figures.words, self.figures.estimated
        if not any(any_roads(tour.legs) for tour in tours):
            return words("straight_estimated" if estimated else "straight")
        mixed = any(not leg.path for tour in tours for leg in tour.legs)
        note = words("some_straight" if mixed else "along_roads")
        return f"{note}; {words('times_estimated')}" if estimated else note

    def credit(self, *, roads: bool) -> str:
        """Return whom to thank for the data of a page, and for its roads where it shows them."""
        words, given = self.figures.words, self.plan.programme.register.credit
        parts = [words("data_credit", credit=given)] if given else []
        if roads:
            parts.append(words("roads_credit"))
        return ". ".join(parts)

    def register_name(self) -> str:
        """Return the file name of the register; the folders of an office are nobody's business."""
        return re.split(r"[\\/]", self.plan.provenance.register_source)[-1]

    def about(self) -> list[str]:
        """Return where the plan came from, line by line."""
        words, made = self.figures.words, self.plan.provenance
        rule = words(f"stop_rule_{made.stop_rule.name.lower()}")
        return [
            words("plan_id", plan=self.plan.plan_id),
            words("made_with", version=made.version, seed=made.seed, effort=made.effort, rule=rule),
            words(
                "register_hash",
                source=self.register_name(),
                digest=made.register_sha256[:_SHORT_HASH],
            ),
        ]

    def common(self) -> dict[str, object]:
        """Return the values that every template asks for."""
        words = self.figures.words
        return {
            "words": words,
            "marked": self.figures.marked,
            "version": self.plan.provenance.version,
            "plan_id": self.plan.plan_id,
            "currency": self.figures.currency,
            "programme": self.plan.programme.title,
            "revision": words("revision", revision=self.plan.provenance.revision),
            "issued": self.figures.issued(self.issued),
            "travel_note": self.travel_note(),
            "credit": self.credit(roads=self.ground is not None),
            "map_note": self.map_note(self.plan.tours),
            "on_roads": False,
            "times_note": words("times_estimated") if self.figures.estimated else "",
            "about": self.about(),
        }
