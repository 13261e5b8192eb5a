"""Order of a day against small published instances, quoted here so that they run anywhere."""

from __future__ import annotations

import numpy as np
import pytest

from georoute.problem import Solution
from georoute.sequence import sequence_tour
from tests.benchmarks.tsplib import TsplibInstance, parse

pytestmark = pytest.mark.source(
    "G. Reinelt, TSPLIB, ORSA Journal on Computing 3 (1991) 376-384; TSPLIB95 (1995): "
    "coordinates, matrices and the list of optimal values"
)

BURMA14 = """NAME: burma14
TYPE: TSP
DIMENSION: 14
EDGE_WEIGHT_TYPE: GEO
NODE_COORD_SECTION
1 16.47 96.10
2 16.47 94.44
3 20.09 92.54
4 22.39 93.37
5 25.23 97.24
6 22.00 96.05
7 20.47 97.02
8 17.20 96.29
9 16.30 97.38
10 14.05 98.12
11 16.53 97.38
12 21.52 95.59
13 19.41 97.13
14 20.09 94.55
EOF
"""
ULYSSES16 = """NAME: ulysses16
TYPE: TSP
DIMENSION: 16
EDGE_WEIGHT_TYPE: GEO
NODE_COORD_SECTION
1 38.24 20.42
2 39.57 26.15
3 40.56 25.32
4 36.26 23.12
5 33.48 10.54
6 37.56 12.19
7 38.42 13.11
8 37.52 20.44
9 41.23 9.10
10 41.17 13.05
11 36.08 -5.21
12 38.47 15.13
13 38.15 15.35
14 37.51 15.17
15 35.49 14.32
16 39.36 19.56
EOF
"""
ULYSSES22 = """NAME: ulysses22
TYPE: TSP
DIMENSION: 22
EDGE_WEIGHT_TYPE: GEO
NODE_COORD_SECTION
1 38.24 20.42
2 39.57 26.15
3 40.56 25.32
4 36.26 23.12
5 33.48 10.54
6 37.56 12.19
7 38.42 13.11
8 37.52 20.44
9 41.23 9.10
10 41.17 13.05
11 36.08 -5.21
12 38.47 15.13
13 38.15 15.35
14 37.51 15.17
15 35.49 14.32
16 39.36 19.56
17 38.09 24.36
18 36.09 23.00
19 40.44 13.57
20 40.33 14.15
21 40.37 14.23
22 37.57 22.56
EOF
"""
BR17 = """NAME: br17
TYPE: ATSP
DIMENSION: 17
EDGE_WEIGHT_TYPE: EXPLICIT
EDGE_WEIGHT_FORMAT: FULL_MATRIX
EDGE_WEIGHT_SECTION
9999 3 5 48 48 8 8 5 5 3 3 0 3 5 8 8 5
3 9999 3 48 48 8 8 5 5 0 0 3 0 3 8 8 5
5 3 9999 72 72 48 48 24 24 3 3 5 3 0 48 48 24
48 48 74 9999 0 6 6 12 12 48 48 48 48 74 6 6 12
48 48 74 0 9999 6 6 12 12 48 48 48 48 74 6 6 12
8 8 50 6 6 9999 0 8 8 8 8 8 8 50 0 0 8
8 8 50 6 6 0 9999 8 8 8 8 8 8 50 0 0 8
5 5 26 12 12 8 8 9999 0 5 5 5 5 26 8 8 0
5 5 26 12 12 8 8 0 9999 5 5 5 5 26 8 8 0
3 0 3 48 48 8 8 5 5 9999 0 3 0 3 8 8 5
3 0 3 48 48 8 8 5 5 0 9999 3 0 3 8 8 5
0 3 5 48 48 8 8 5 5 3 3 9999 3 5 8 8 5
3 0 3 48 48 8 8 5 5 0 0 3 9999 3 8 8 5
5 3 0 72 72 48 48 24 24 3 3 5 3 9999 48 48 24
8 8 50 6 6 0 0 8 8 8 8 8 8 50 9999 0 8
8 8 50 6 6 0 0 8 8 8 8 8 8 50 0 9999 8
5 5 26 12 12 8 8 0 0 5 5 5 5 26 8 8 9999
EOF
"""


@pytest.mark.parametrize("seed", range(2))
@pytest.mark.parametrize(
    ("name", "text", "optimum"),
    [
        ("burma14", BURMA14, 3323),
        ("ulysses16", ULYSSES16, 6859),
        ("ulysses22", ULYSSES22, 7013),
        ("br17", BR17, 39),
    ],
)
def test_small_published_instances_are_solved(
    name: str, text: str, optimum: int, seed: int
) -> None:
    instance = TsplibInstance(name, *parse(text))
    problem = instance.problem()
    start = np.arange(problem.visit_count, dtype=np.int64)
    found = sequence_tour(problem, 0, start, kicks=20 * instance.size, seed=seed)
    tours = instance.tours(Solution(orders=(found.order,)))
    assert instance.violations(tours) == ()
    assert instance.cost(tours) == optimum


def test_the_table_of_a_published_instance_is_what_its_text_says() -> None:
    instance = TsplibInstance("ulysses22", *parse(ULYSSES22))
    table = instance.problem().travel.time_ms
    for i in range(22):
        for j in range(22):
            expected = 0 if i == j else instance.distance(i + 1, j + 1)
            assert table[i, j] == 1_000_000 * expected
