"""Banned turns become part of the network: junctions are doubled only where a ban needs a memory.

A ban is a sequence of arcs that may not be driven one after the other. What a driver must remember
at a junction is the longest end of the way driven so far that begins some ban: the state of the
automaton of A. V. Aho and M. J. Corasick ("Efficient string matching: an aid to bibliographic
search", Communications of the ACM 18 (1975) 333-340), with arcs for letters and bans for words.
A *node* of the expanded network is a junction together with such a state; nearly everywhere the
state is empty and the node is the junction itself. Bans by way of a junction, by way of one or
several ways, and bans that overlap are all exact.

Roads that are open only to those whose trip begins or ends there are set apart in the same way.
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

__all__ = ["CONNECTOR", "Expansion", "arc_ends", "expand", "set_apart"]

CONNECTOR = -1
"""The arc of the table of an arc between levels, which takes no time."""

_SHORTEST_BAN = 2


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Expansion:
    """X nodes and A arcs between them, such that every path obeys every ban.

    ``junction``: int64 (X,), where each node is; the first N are the junctions with nothing to
    remember. ``tail``, ``head``: int64 (A,), nodes; ``arc``: int64 (A,), the arc of the table that
    is driven, or ``CONNECTOR``. ``is_last``: bool (A,), a trip may end on it.

    ``after``: int64 (2 E,), the node where a trip that begins on an arc leaves it, -1 where the
    arc is closed. ``unusable``: bans left out because their arcs do not follow one another or are
    fewer than two.
    """

    junction: NDArray[np.int64]
    tail: NDArray[np.int64]
    head: NDArray[np.int64]
    arc: NDArray[np.int64]
    is_last: NDArray[np.bool_]
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
    driven = np.concatenate((arcs, more[2]))
    return Expansion(
        junction=np.concatenate((np.arange(junctions, dtype=np.int64), head[last])),
        tail=np.concatenate((tail[arcs], more[0])),
        head=np.concatenate((after[arcs], more[1])),
        arc=driven,
        is_last=np.ones(driven.size, np.bool_),
        after=after,
        unusable=unusable,
    )


def set_apart(expansion: Expansion, is_local: NDArray[np.bool_]) -> Expansion:
    """Let local arcs be driven at the beginning and at the end of a trip only.

    The nodes of local arcs get two more levels, one for the first leg and one for the last. A
    trip that begins locally begins on the first level, goes down to the level of the roads open
    to all, and from there to the last level; no arc leads back. A trip within one local zone
    passes the middle level at a node of the zone and may so stay in it throughout.

    Parameters
    ----------
    expansion
        The network as if all arcs were open to all.
    is_local
        Shape (2 E,): which arcs of the table are for the first and last leg only.

    Returns
    -------
    The network on three levels.
    """
    local = is_local[expansion.arc]
    if not local.any():
        return expansion
    nodes = expansion.junction.size
    tail, head, arc = expansion.tail, expansion.head, expansion.arc
    touched = np.unique(np.concatenate((tail[local], head[local])))
    first = np.full(nodes, -1, np.int64)
    first[touched] = nodes + np.arange(touched.size)
    last = np.full(nodes, -1, np.int64)
    last[touched] = first[touched] + touched.size
    opened = np.flatnonzero(is_local & (expansion.after >= 0))
    after = expansion.after.copy()
    after[opened] = first[after[opened]]
    none = np.full(touched.size, CONNECTOR, np.int64)
    inner = np.count_nonzero(~local)
    is_last = np.zeros(inner + 2 * (none.size + arc[local].size), np.bool_)
    is_last[:inner] = True
    is_last[is_last.size - arc[local].size :] = True
    return Expansion(
        junction=np.concatenate((expansion.junction, *2 * [expansion.junction[touched]])),
        tail=np.concatenate(
            (tail[~local], first[tail[local]], first[touched], touched, last[tail[local]])
        ),
        head=np.concatenate(
            (head[~local], first[head[local]], touched, last[touched], last[head[local]])
        ),
        arc=np.concatenate((arc[~local], arc[local], none, none, arc[local])),
        is_last=is_last,
        after=after,
        unusable=expansion.unusable,
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
