"""What a reader of roads noticed, counted by kind, each kind with an example."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from georoute.roads.model import RoadRemark

if TYPE_CHECKING:
    from collections.abc import Mapping

__all__ = ["TEXTS", "Tally"]

TEXTS: Mapping[str, str] = {
    "way_not_for_cars": "pedestrian streets, building sites and the like were left out",
    "way_area": "ways that draw the outline of an area were left out",
    "way_reversible": "ways whose direction changes with the hour were left out",
    "way_shut": "ways are closed to cars in both directions and were left out",
    "way_cut": "ways lack nodes in this file and were cut there",
    "way_without_nodes": "ways have fewer than two nodes in this file and were left out",
    "way_local": "ways are for trips that begin or end there: no through traffic",
    "access_unknown": "values of access are unknown and were passed over",
    "access_conditional": "access depends on the hour or the vehicle: not applied, look yourself",
    "oneway_unknown": "values of oneway are unknown and were passed over",
    "oneway_conditional": "one-way rules depend on the hour: not applied, look yourself",
    "speed_implausible": "limits are not plausible; the speed of the class was taken",
    "speed_unread": "limits could not be read; the speed of the class was taken",
    "speed_signals": "limits are set by signals; the speed of the class was taken",
    "speed_several": "several limits on one way; the lowest was taken",
    "speed_country_unknown": "limits name a country whose law is not in the table; generic taken",
    "speed_conditional": "limits depend on the hour or the weather: not applied",
    "vehicle_too_high": "ways are too low for the vehicle and were closed",
    "vehicle_too_heavy": "ways are too weak for the vehicle and were closed",
    "vehicle_too_wide": "ways are too narrow for the vehicle and were closed",
    "vehicle_limit_unread": "limits of height, weight or width could not be read: not applied",
    "ferry": "ferries carry cars",
    "ferry_cars_unsaid": "ferries do not say whether they carry cars and were left out",
    "ferry_duration_unread": "durations of ferries could not be read; 20 km/h was taken",
    "ferry_speed_assumed": "ferries tell no duration; 20 km/h was taken",
    "barrier_closed": "barriers close a road to cars; the road was split there",
    "barrier_local": "gates are for trips that begin or end there: no through traffic",
    "closed_on_junction": "closed barriers stand on a junction; all its roads were split there",
    "local_on_junction": "gates with limited access stand on a junction: passed over",
    "barrier_unknown": "barriers of an unknown kind were passed over",
    "restriction_read": "turn restrictions are obeyed",
    "restriction_conditional": "turn restrictions hold at some hours only: not applied",
    "restriction_except": "turn restrictions do not hold for cars",
    "restriction_other_vehicle": "turn restrictions name other vehicles only",
    "restriction_unknown": "turn restrictions are of an unknown kind: not applied",
    "restriction_members": "turn restrictions lack a member or have too many: not applied",
    "restriction_not_here": "turn restrictions name ways that are not in this network: no effect",
    "restriction_not_joined": "turn restrictions name ways that do not meet: not applied",
    "restriction_ambiguous": "turn restrictions can be read in two ways: not applied",
    "restriction_not_drivable": "turn restrictions name turns no car can make: no effect",
    "source_without_turns": "sources of this kind hold no turn restrictions and no barriers",
    "row_incomplete": "rows lack an end, a shape or a number and were left out",
    "row_speed_missing": "rows have no usable speed; the speed of the class was taken",
}


@dataclass(slots=True)
class Tally:
    """Counts by code; the first example of each is kept."""

    counts: dict[str, int] = field(default_factory=dict)
    examples: dict[str, str] = field(default_factory=dict)

    def add(self, code: str, example: str = "", *, count: int = 1) -> None:
        """Count one more of a kind."""
        if count <= 0:
            return
        self.counts[code] = self.counts.get(code, 0) + count
        if example and code not in self.examples:
            self.examples[code] = example

    def remarks(self) -> tuple[RoadRemark, ...]:
        """Return all kinds that were met, in the order of the texts."""
        return tuple(
            RoadRemark(
                code=code, count=self.counts[code], text=text, example=self.examples.get(code, "")
            )
            for code, text in TEXTS.items()
            if code in self.counts
        )
