"""Banned turns become part of the network: junctions are doubled only where a ban needs a memory.

A ban is a sequence of arcs that may not be driven one after the other. What a driver must remember
at a junction is the longest end of the way driven so far that begins some ban: the state of the
automaton of A. V. Aho and M. J. Corasick ("Efficient string matching: an aid to bibliographic
search", Communications of the ACM 18 (1975) 333-340), with arcs for letters and bans for words.
A *node* of the expanded network is a junction together with such a state; nearly everywhere the
state is empty and the node is the junction itself. Bans by way of a junction, by way of one or
several ways, and bans that overlap are all exact.
"""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from numpy.typing import NDArray

    from georoute.roads.model import RoadTable

__all__ = ["Expansion", "arc_ends", "expand"]

_SHORTEST_BAN = 2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Expansion:
    """X nodes and A arcs between them, such that every path obeys every ban.

    ``junction``: int64 (X,), where each node is; the first N are the junctions with nothing to
    remember. ``tail``, ``head``: int64 (A,), nodes; ``arc``: int64 (A,), the arc of the table that
    is driven. ``after``: int64 (2 E,), the node where a trip that begins on an arc leaves it, -1
    where the arc is closed. ``unusable``: bans left out because their arcs do not follow one
    another or are fewer than two.
    """

    junction: NDArray[np.int64]
    tail: NDArray[np.int64]
    head: NDArray[np.int64]
    arc: NDArray[np.int64]
    after: NDArray[np.int64]
    unusable: int


class _Memory:
    """The automaton: states are beginnings of bans, 0 the empty one."""

    def __init__(self, bans: Iterable[Sequence[int]]) -> None:
        self.next: list[dict[int, int]] = [{}]
        self.last: list[int] = [-1]
        self.dead: list[bool] = [False]
        for ban in bans:
            self._add(ban)
        self.fail = [0] * len(self.next)
        self._link()

    def _add(self, ban: Sequence[int]) -> None:
        state = 0
        for arc in ban:
            follower = self.next[state].get(arc)
            if follower is None:
                follower = len(self.next)
                self.next[state][arc] = follower
                self.next.append({})
                self.last.append(arc)
                self.dead.append(False)
            state = follower
        self.dead[state] = True

    def _link(self) -> None:
        waiting = deque(self.next[0].values())
        while waiting:
            state = waiting.popleft()
            for arc, follower in self.next[state].items():
                self.fail[follower] = self.step(self.fail[state], arc)
                # A ban that ends here under another, shorter beginning forbids this one too.
                self.dead[follower] |= self.dead[self.fail[follower]]
                waiting.append(follower)

    def step(self, state: int, arc: int) -> int:
        """Return the state after driving ``arc``."""
        while state and arc not in self.next[state]:
            state = self.fail[state]
        return self.next[state].get(arc, 0)


def arc_ends(table: RoadTable) -> tuple[NDArray[np.int64], NDArray[np.int64]]:
    """Return the junctions where each of the 2 E arcs of a table begins and ends."""
    tail = np.stack((table.start, table.end), axis=1).reshape(-1)
    head = np.stack((table.end, table.start), axis=1).reshape(-1)
    return tail.astype(np.int64), head.astype(np.int64)


def expand(table: RoadTable, is_open: NDArray[np.bool_]) -> Expansion:
    """Double junctions where bans need it.

    Parameters
    ----------
    table
        Stretches and bans.
    is_open
        Shape (2 E,): which arcs may be driven at all.

    Returns
    -------
    The expanded network; arcs are in no particular order.
    """
    tail, head = arc_ends(table)
    bans, unusable = _bans(table, tail, head, is_open)
    memory = _Memory(bans)
    junctions = table.node_lat.shape[0]
    living = [state for state in range(1, len(memory.next)) if not memory.dead[state]]
    node_of = np.zeros(len(memory.next), np.int64)
    node_of[living] = junctions + np.arange(len(living))

    arcs = np.flatnonzero(is_open)
    after = np.where(is_open, head, -1)
    for arc, state in memory.next[0].items():
        after[arc] = node_of[state]
    more = _arcs_of_states(memory, living, node_of, (tail, head, arcs))
    last = np.array([memory.last[state] for state in living], np.int64)
    return Expansion(
        junction=np.concatenate((np.arange(junctions, dtype=np.int64), head[last])),
        tail=np.concatenate((tail[arcs], more[0])),
        head=np.concatenate((after[arcs], more[1])),
        arc=np.concatenate((arcs, more[2])),
        after=after,
        unusable=unusable,
    )


def _bans(
    table: RoadTable,
    tail: NDArray[np.int64],
    head: NDArray[np.int64],
    is_open: NDArray[np.bool_],
) -> tuple[list[list[int]], int]:
    """Return the bans that can be broken at all, and the number of those that make no sense."""
    found, unusable = [], 0
    for first, end in zip(table.ban_ptr[:-1], table.ban_ptr[1:], strict=True):
        arcs = table.ban_arc[first:end]
        known = arcs.size >= _SHORTEST_BAN and arcs.min() >= 0 and arcs.max() < tail.size
        if not known or np.any(head[arcs[:-1]] != tail[arcs[1:]]):
            unusable += 1
        elif is_open[arcs].all():
            found.append(arcs.tolist())
    return found, unusable


def _arcs_of_states(
    memory: _Memory,
    living: list[int],
    node_of: NDArray[np.int64],
    arcs: tuple[NDArray[np.int64], NDArray[np.int64], NDArray[np.int64]],
) -> NDArray[np.int64]:
    """Return tails, heads and arcs, shape (3, n), of what may be driven from states with memory."""
    tail, head, opened = arcs
    by_tail = opened[np.argsort(tail[opened], kind="stable")]
    sorted_tail = tail[by_tail]
    found = []
    for state in living:
        place = head[memory.last[state]]
        first, end = np.searchsorted(sorted_tail, (place, place + 1))
        for arc in by_tail[first:end].tolist():
            then = memory.step(state, arc)
            if not memory.dead[then]:
                node = node_of[then] if then else head[arc]
                found.append((node_of[state], node, arc))
    return np.array(found, np.int64).reshape(-1, 3).T
