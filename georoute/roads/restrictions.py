"""Turn restrictions made into sequences of arcs that may not be driven.

Wiki of OpenStreetMap, page Relation:restriction (followed from memory): ``no_*`` and ``only_*``,
via a node or via one or more ways, ``except``, ``restriction:motorcar``, several ``from`` of
``no_entry`` and several ``to`` of ``no_exit``. A restriction that holds at some hours only is
reported and not applied. What cannot be read in exactly one way is reported, not guessed.
"""

from __future__ import annotations

from itertools import pairwise, product
from typing import TYPE_CHECKING, NamedTuple

import numpy as np

from georoute.kernels.arrays import UNREACHABLE

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Mapping, Sequence

    from numpy.typing import NDArray

    from georoute.roads.osm_passes import RawRestriction
    from georoute.roads.remarks import Tally
    from georoute.roads.stretches import Stretches

__all__ = ["RoadArcs", "bans_of", "read_restriction"]

Arcs = tuple[int, ...]

_KINDS = frozenset(
    {
        "no_left_turn", "no_right_turn", "no_straight_on", "no_u_turn", "no_entry", "no_exit",
        "only_left_turn", "only_right_turn", "only_straight_on", "only_u_turn",
    }
)  # fmt: skip
_KEYS = ("restriction:motorcar", "restriction:motor_vehicle", "restriction:vehicle", "restriction")
_HOURS_KEYS = ("day_on", "day_off", "hour_on", "hour_off", "time", "date_on", "date_off")
_CARS = frozenset({"motorcar", "motor_vehicle", "vehicle"})


def read_restriction(tags: Mapping[str, str]) -> tuple[str, str]:
    """Return the kind of a restriction for cars, or the code why it is not applied.

    One of the two is empty.
    """
    kind = next((tags[key].strip() for key in _KEYS if key in tags), "")
    exempt = {part.strip() for part in tags.get("except", "").split(";")}
    if exempt & _CARS:
        return "", "restriction_except"
    if any(key in tags for key in _HOURS_KEYS):
        return "", "restriction_conditional"
    if not kind:
        if any(f"{key}:conditional" in tags for key in _KEYS):
            return "", "restriction_conditional"
        other = any(key.startswith("restriction:") for key in tags)
        return "", "restriction_other_vehicle" if other else "restriction_unknown"
    if "@" in kind:
        return "", "restriction_conditional"
    return (kind, "") if kind in _KINDS else ("", "restriction_unknown")


class RoadArcs:
    """Looks up arcs of stretches: those of a way, and those that leave a node."""

    def __init__(self, stretches: Stretches, way_ids: NDArray[np.int64]) -> None:
        self.tail = np.column_stack([stretches.start, stretches.end]).ravel()
        self.head = np.column_stack([stretches.end, stretches.start]).ravel()
        times = np.column_stack([stretches.forward_ms, stretches.backward_ms]).ravel()
        self.open = times < UNREACHABLE
        ids = way_ids[stretches.of_way]
        self._by_way = np.argsort(ids, kind="stable")
        self._ways = ids[self._by_way]
        self._by_tail = np.argsort(self.tail, kind="stable")
        self._tails = self.tail[self._by_tail]
        self._by_ref = np.argsort(stretches.node_ref, kind="stable")
        self._refs = stretches.node_ref[self._by_ref]

    def stretches_of(self, way: int) -> list[int]:
        """Return the stretches of a way, in its order."""
        low, high = np.searchsorted(self._ways, [way, way + 1])
        return [int(stretch) for stretch in self._by_way[low:high]]

    def of_way(self, way: int) -> list[int]:
        """Return the open arcs of a way."""
        arcs = (arc for stretch in self.stretches_of(way) for arc in (2 * stretch, 2 * stretch + 1))
        return [arc for arc in arcs if self.open[arc]]

    def leaving(self, node: int) -> list[int]:
        """Return the open arcs that leave a node."""
        low, high = np.searchsorted(self._tails, [node, node + 1])
        return [int(arc) for arc in self._by_tail[low:high] if self.open[arc]]

    def nodes_of(self, ref: int) -> set[int]:
        """Return the nodes of the table that a node of the source became."""
        low, high = np.searchsorted(self._refs, [ref, ref + 1])
        return {int(node) for node in self._by_ref[low:high]}

    def passages(self, way: int, node: int) -> Iterator[Arcs]:
        """Yield the ways along a whole way from one of its ends, at ``node``, to the other."""
        stretches = self.stretches_of(way)
        along = tuple(2 * stretch for stretch in stretches)
        against = tuple(2 * stretch + 1 for stretch in reversed(stretches))
        for arcs in (along, against):
            joined = all(self.head[a] == self.tail[b] for a, b in pairwise(arcs))
            if arcs and joined and self.tail[arcs[0]] == node and all(self.open[list(arcs)]):
                yield arcs


class _Members(NamedTuple):
    """The members of a restriction by role."""

    from_ways: list[int]
    via_nodes: list[int]
    via_ways: list[int]
    to_ways: list[int]


def _members(restriction: RawRestriction, kind: str) -> _Members | None:
    """Return the members by role, or nothing if one lacks or there are too many."""
    found = _Members([], [], [], [])
    for member, number, role in restriction.members:
        if role == "from" and member == "w":
            found.from_ways.append(number)
        elif role == "to" and member == "w":
            found.to_ways.append(number)
        elif role == "via" and member == "n":
            found.via_nodes.append(number)
        elif role == "via" and member == "w":
            found.via_ways.append(number)
    several_from = len(found.from_ways) > 1 and kind != "no_entry"
    several_to = len(found.to_ways) > 1 and kind != "no_exit"
    via = (len(found.via_nodes) == 1) != bool(found.via_ways)
    complete = found.from_ways and found.to_ways and via and len(found.via_nodes) <= 1
    return found if complete and not (several_from or several_to) else None


def _through_ways(arcs: RoadArcs, ways: Sequence[int], node: int) -> Iterator[Arcs]:
    """Yield the arcs over all via ways from a node on, in whatever order the ways join."""
    if not ways:
        yield ()
        return
    for index, way in enumerate(ways):
        rest = [*ways[:index], *ways[index + 1 :]]
        for passage in arcs.passages(way, node):
            for onward in _through_ways(arcs, rest, int(arcs.head[passage[-1]])):
                yield passage + onward


def _sequences(arcs: RoadArcs, from_way: int, members: _Members, to_way: int) -> set[Arcs]:
    """Return all sequences of open arcs from one way over the via members into another."""
    via = arcs.nodes_of(members.via_nodes[0]) if members.via_nodes else None
    onto = arcs.of_way(to_way)
    found: set[Arcs] = set()
    for first in arcs.of_way(from_way):
        node = int(arcs.head[first])
        if via is not None and node not in via:
            continue
        for middle in _through_ways(arcs, members.via_ways, node):
            last = int(arcs.head[middle[-1]]) if middle else node
            found.update((first, *middle, arc) for arc in onto if arcs.tail[arc] == last)
    return found


def _without_turning_back(
    sequences: set[Arcs], kind: str, *, same_way: bool
) -> set[Arcs]:  # fmt: skip
    """Leave out turns about on the spot unless the restriction speaks of them.

    A way that ends at the via node and is both ``from`` and ``to`` gives its own way back; one
    that runs through the node gives both its way on and its way back.
    """
    if kind.endswith("_u_turn") and same_way:
        return {s for s in sequences if any(a ^ 1 == b for a, b in pairwise(s))}
    return {s for s in sequences if all(a ^ 1 != b for a, b in pairwise(s))}


def _only(arcs: RoadArcs, sequence: Arcs) -> Iterator[Arcs]:
    """Yield the bans of everything that leaves a sequence before its end."""
    for length in range(1, len(sequence)):
        driven, wanted = sequence[:length], sequence[length]
        for arc in arcs.leaving(int(arcs.head[driven[-1]])):
            if arc != wanted:
                yield (*driven, arc)


def _bans(arcs: RoadArcs, restriction: RawRestriction, kind: str) -> tuple[list[Arcs], str]:
    """Return the bans of one restriction, and the code of what came of it."""
    members = _members(restriction, kind)
    if members is None:
        return [], "restriction_members"
    ways = {*members.from_ways, *members.via_ways, *members.to_ways}
    if not all(arcs.stretches_of(way) for way in ways):
        return [], "restriction_not_here"
    if members.via_nodes and not arcs.nodes_of(members.via_nodes[0]):
        return [], "restriction_not_joined"
    bans: list[Arcs] = []
    read = False
    for from_way, to_way in product(members.from_ways, members.to_ways):
        found = _sequences(arcs, from_way, members, to_way)
        found = _without_turning_back(found, kind, same_way=from_way == to_way)
        if len(found) > 1:
            return [], "restriction_ambiguous"
        read = read or bool(found)
        for sequence in found:
            bans.extend(_only(arcs, sequence) if kind.startswith("only_") else [sequence])
    if read:
        return bans, "restriction_read"
    return [], _why_none(arcs, members)


def _why_none(arcs: RoadArcs, members: _Members) -> str:
    """Tell turns that the map joins but no car can make from ways that do not meet."""
    if not members.via_nodes:
        return "restriction_not_joined"
    via = arcs.nodes_of(members.via_nodes[0])

    def touches(way: int) -> bool:
        return any(
            int(node) in via
            for stretch in arcs.stretches_of(way)
            for node in (arcs.tail[2 * stretch], arcs.head[2 * stretch])
        )

    meet = all(touches(way) for way in (*members.from_ways, *members.to_ways))
    return "restriction_not_drivable" if meet else "restriction_not_joined"


def bans_of(
    restrictions: Iterable[RawRestriction],
    *,
    stretches: Stretches,
    way_ids: NDArray[np.int64],
    tally: Tally,
) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return ``ban_ptr`` and ``ban_arc`` of all restrictions; count what came of each.

    ``way_ids``: the ids of the ways that ``stretches.of_way`` points into.
    """
    arcs = RoadArcs(stretches, way_ids)
    bans: dict[Arcs, None] = {}
    for restriction in restrictions:
        kind, code = read_restriction(restriction.tags)
        found: list[Arcs] = []
        if kind:
            found, code = _bans(arcs, restriction, kind)
        elif not any(arcs.stretches_of(n) for m, n, _ in restriction.members if m == "w"):
            code = "restriction_not_here"
        text = kind or restriction.tags.get("restriction", "")
        tally.add(code, f"relation {restriction.number} {text}".rstrip())
        bans.update(dict.fromkeys(found))
    lengths = np.array([len(ban) for ban in bans], np.int64)
    flat = np.array([arc for ban in bans for arc in ban], np.int64)
    return np.concatenate([[0], np.cumsum(lengths)]).astype(np.int64), flat
