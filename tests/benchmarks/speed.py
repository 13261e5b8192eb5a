"""Ratios of speed against reference libraries, both measured in the same run.

``python -m tests.benchmarks speed [--small] [--repeats K] [--json FILE]``. Times are medians of
repeated runs on one thread, after compilation. Nothing is asserted: ratios of one machine under
load say little on another.
"""

from __future__ import annotations

import argparse
import json
import statistics
import time
from collections.abc import Callable, Sequence
from dataclasses import asdict, dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray
from pyproj import Geod
from sklearn.metrics.pairwise import haversine_distances

from georoute.kernels.geodesic import MEAN_RADIUS_M
from georoute.measure import geodesic_matrix_m, great_circle_matrix_m

__all__ = ["Ratio", "main", "measure_ratios"]

FULL = 5000
SMALL = 1000
REPEATS = 3


@dataclass(frozen=True)
class Ratio:
    """One comparison: median seconds of both, and how far the results differ in metres."""

    name: str
    reference: str
    n: int
    own_s: float
    reference_s: float
    largest_difference_m: float

    @property
    def times_faster(self) -> float:
        """How many times the reference's time is the product's own."""
        return self.reference_s / self.own_s


def geod_rows(lat: NDArray[np.float64], lon: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return all geodesics by a loop over rows, each row one call of ``Geod.inv``."""
    geod = Geod(ellps="WGS84")
    n = lat.shape[0]
    out = np.empty((n, n), np.float64)
    for i in range(n):
        out[i] = geod.inv(np.full(n, lon[i]), np.full(n, lat[i]), lon, lat)[2]
    return out


def sklearn_haversine(lat: NDArray[np.float64], lon: NDArray[np.float64]) -> NDArray[np.float64]:
    """Return all great circles by scikit-learn."""
    points = np.radians(np.column_stack([lat, lon]))
    return np.asarray(MEAN_RADIUS_M * haversine_distances(points), np.float64)


Matrix = Callable[[NDArray[np.float64], NDArray[np.float64]], NDArray[np.float64]]


def compare(name: str, own: Matrix, reference: Matrix, *, n: int, repeats: int) -> Ratio:
    """Time both on the same seeded region of 400 km, taking turns."""
    rng = np.random.default_rng(20_240_601)
    lat, lon = -30 + rng.uniform(-2, 2, n), -71 + rng.uniform(-2, 2, n)
    own(lat[:2], lon[:2])
    own_times, reference_times = [], []
    difference = 0.0
    for turn in range(repeats):
        start = time.perf_counter()
        ours = own(lat, lon)
        middle = time.perf_counter()
        theirs = reference(lat, lon)
        reference_times.append(time.perf_counter() - middle)
        own_times.append(middle - start)
        if turn == 0:
            difference = float(np.max(np.abs(ours - theirs)))
        del ours, theirs
    return Ratio(
        name=name,
        reference=reference.__name__,
        n=n,
        own_s=statistics.median(own_times),
        reference_s=statistics.median(reference_times),
        largest_difference_m=difference,
    )


def measure_ratios(*, n: int, repeats: int) -> list[Ratio]:
    """Return every comparison at ``n`` places."""
    return [
        compare("geodesic matrix", geodesic_matrix_m, geod_rows, n=n, repeats=repeats),
        compare(
            "great circle matrix", great_circle_matrix_m, sklearn_haversine, n=n, repeats=repeats
        ),
    ]


def main(arguments: Sequence[str] | None = None) -> int:
    """Print one row a comparison; return the exit code."""
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks speed")
    parser.add_argument("--small", action="store_true", help=f"{SMALL} places, not {FULL}")
    parser.add_argument("--repeats", type=int, default=REPEATS, help="runs; medians are printed")
    parser.add_argument("--json", type=Path, help="also write the figures to this file")
    chosen = parser.parse_args(arguments)
    ratios = measure_ratios(n=SMALL if chosen.small else FULL, repeats=chosen.repeats)
    for ratio in ratios:
        print(
            f"{ratio.name} {ratio.n} x {ratio.n}: {ratio.own_s:.3f} s; "
            f"{ratio.reference} {ratio.reference_s:.3f} s; {ratio.times_faster:.1f} times faster; "
            f"largest difference {ratio.largest_difference_m:.2g} m"
        )
    if chosen.json:
        rows = [{**asdict(ratio), "times_faster": ratio.times_faster} for ratio in ratios]
        chosen.json.write_text(json.dumps(rows, indent=2) + "\n", encoding="utf-8")
    print(f"speed: {len(ratios)} ratios, medians of {chosen.repeats} runs each")
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
