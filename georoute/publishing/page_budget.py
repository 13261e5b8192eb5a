"""How many bytes the ground under the tours may take of a page."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from georoute.publishing.ground import DETAILS, box_around, fitting

if TYPE_CHECKING:
    from collections.abc import Mapping, Sequence

    from numpy.typing import NDArray

    from georoute.publishing.frame import Page
    from georoute.publishing.ground import Detail, Ground

__all__ = ["AIM_BYTES", "MOST_BYTES", "ground_bytes", "page_on_ground"]

MOST_BYTES = 400_000
"""No page with a map may be larger."""
AIM_BYTES = 330_000
"""What a page with a map should stay below."""
_SPARE = 2_000
_LEAST = 40_000
"""A ground of this size is worth passing the aim, never the limit."""


def ground_bytes(page_bytes: int) -> int:
    """Return the bytes left for the ground on a page that has ``page_bytes`` without it."""
    aim = max(AIM_BYTES - page_bytes, _LEAST)
    return max(0, min(aim, MOST_BYTES - _SPARE - page_bytes))


def page_on_ground(
    page: Page,
    island: Mapping[str, object],
    values: Mapping[str, object],
    ground: Ground,
    where_m: tuple[Sequence[NDArray[np.float64]], NDArray[np.float64]],
    details: Sequence[Detail] = DETAILS,
) -> str:
    """Return a page with as much ground as it has room for around tours and places in metres."""
    tours_m, places_m = where_m
    bare = page.page_text(island, values)
    budget = ground_bytes(len(bare.encode("utf-8", "replace")))
    box = box_around(np.vstack([*tours_m, places_m]))
    told = fitting(ground, box, tours_m, budget, details)
    return page.page_text({**island, "ground": told}, values)
