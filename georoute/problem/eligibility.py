"""Which visits may go on which shift, and why not where they may not."""

from __future__ import annotations

from enum import IntEnum
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray

    from georoute.domain.people import Shift
    from georoute.domain.sites import Visit

__all__ = ["WhyNot", "why_not"]


class WhyNot(IntEnum):
    """Why a visit may not go on a shift; 0 where it may."""

    ELIGIBLE = 0
    BEFORE_EARLIEST = 1
    AFTER_LATEST = 2
    OTHER_INSPECTOR = 3


def why_not(visits: Sequence[Visit], shifts: Sequence[Shift]) -> NDArray[np.int8]:
    """Return a ``WhyNot`` code for each visit and shift, int8 of shape (V, S)."""
    days = np.array([shift.day.toordinal() for shift in shifts], np.int64)
    codes = np.zeros((len(visits), len(shifts)), np.int8)
    for row, visit in zip(codes, visits, strict=True):
        if visit.inspector_ids:
            allowed = [shift.inspector_id in visit.inspector_ids for shift in shifts]
            row[~np.array(allowed, np.bool_)] = WhyNot.OTHER_INSPECTOR
        if visit.earliest is not None:
            row[days < visit.earliest.toordinal()] = WhyNot.BEFORE_EARLIEST
        if visit.latest is not None:
            row[days > visit.latest.toordinal()] = WhyNot.AFTER_LATEST
    return codes
