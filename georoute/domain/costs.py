"""What travel costs: seconds and metres kept apart, and the tariff that prices them."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from georoute.domain.roads import Ways

__all__ = ["CostMatrix", "Places", "Tariff"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Tariff:
    """Money: per paid hour, per kilometre, per overtime hour, per day opened.

    ``overtime_hour`` is the whole price of an hour beyond the paid length (not a supplement).
    """

    currency: str = "EUR"
    hour: float
    km: float
    overtime_hour: float
    day_opened: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CostMatrix:
    """Travel between all pairs of places, in the order of ``place_ids``.

    ``travel_s`` and ``length_m`` are float64 arrays of shape (n, n); entry ``[i, j]`` is the leg
    *from* i *to* j, so both may be asymmetric. An unreachable pair is ``inf`` in both.
    ``source`` says in words where the figures come from; ``estimated`` is true unless they
    were measured on roads or given by the user; ``low_factor`` and ``high_factor`` bound the
    true time as a multiple of the estimate (1.0 where no interval is claimed). ``ways`` knows how
    legs are driven where they were measured along roads.
    """

    place_ids: tuple[str, ...]
    travel_s: NDArray[np.float64]
    length_m: NDArray[np.float64]
    source: str
    estimated: bool
    low_factor: float = 1.0
    high_factor: float = 1.0
    ways: Ways | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Places:
    """The places travel is measured between: ids and WGS 84 degrees.

    ``lat_deg`` and ``lon_deg`` are float64 arrays of shape (n,).
    """

    ids: tuple[str, ...]
    lat_deg: NDArray[np.float64]
    lon_deg: NDArray[np.float64]
