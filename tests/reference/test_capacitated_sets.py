"""The benchmark runner on days together, with and without the published sets."""

from __future__ import annotations

import json
import re
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from tests.benchmarks import reference
from tests.benchmarks.capacitated import CapacitatedInstance, read_exact
from tests.benchmarks.instance import Tour
from tests.benchmarks.records import Row, closing
from tests.benchmarks.runner import READERS, chosen_instances, main

CHRISTOFIDES = (
    "N. Christofides, A. Mingozzi, P. Toth, in Combinatorial Optimization, Wiley 1979, 315-338: "
    "CMT1, best known length 524.61; its tours from memory"
)
LEAST = (
    "38 9 30 34 50 16 21 29 2 11",
    "32 1 22 20 35 36 3 28 31 26 8",
    "27 48 23 7 43 24 25 14 6",
    "18 13 41 40 19 42 17 4 47",
    "12 37 44 15 45 33 39 10 49 5 46",
)
FIGURES = r"(\d+) instances, mean gap (-?\d+\.\d{3}) %, worst (-?\d+\.\d{3}) %, violations (\d+)"
CLOSING = re.compile(rf"([\w-]+): {FIGURES}")
CLOSING_BESIDE = re.compile(rf"{CLOSING.pattern}; OR-Tools \d+\.\d+ in the same seconds: {FIGURES}")
TWO_SIDES = """NAME: sides
DIMENSION: 5
CAPACITY: 10
NODE_COORD_SECTION
1 0 0
2 3 0
3 3 4.2
4 -3 0
5 -3 -4.2
DEMAND_SECTION
1 0
2 5
3 5
4 6
5 4
DEPOT_SECTION
1
-1
EOF
"""
ROW = Row(
    instance="one",
    size=4,
    best_known=100.0,
    median=101.0,
    best=100.5,
    cpu_s=2.0,
    iterations=7,
    violations=1,
    solver="georoute",
)


@pytest.mark.source("common practice: gap = value / best known - 1")
def test_the_closing_line_counts_all_rows() -> None:
    rows = [ROW, replace(ROW, median=103.0, violations=0)]
    assert closing(rows) == "2 instances, mean gap 2.000 %, worst 3.000 %, violations 1"
    lost = replace(ROW, median=float("inf"), violations=0, solver="other")
    assert "other no solution" in lost.text_beside()
    assert closing([*rows, lost]) == (
        "3 instances, mean gap 2.000 %, worst 3.000 %, violations 1, 1 without a solution"
    )


@pytest.mark.source("hand arithmetic: tours around two sides, each rounded leg counted")
def test_the_runner_plans_days_beside_the_reference(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    folder = tmp_path / "uchoa-x-cvrp"
    (folder / "instances").mkdir(parents=True)
    (folder / "instances" / "sides.vrp").write_text(TWO_SIDES)
    # Legs 3, 4 (of 4.2) and 5 (of 5.16) on either side make 24; 20 is told, to have a gap.
    (folder / "best_known.csv").write_text("instance,best_known\nsides,20\n")
    kept, solved = tmp_path / "runs.json", tmp_path / "solved"
    call = ["uchoa-x-cvrp", "--data", str(tmp_path), "--seconds", "0.1", "--seeds", "2"]
    call += ["--reference", "--json", str(kept), "--solutions", str(solved)]
    assert main(call) == 0
    lines = capsys.readouterr().out.splitlines()
    figures = "1 instances, mean gap 20.000 %, worst 20.000 %, violations 0"
    assert lines[-1] == (
        f"uchoa-x-cvrp: {figures}; {reference.NAME} in the same seconds: {figures}"
    )
    assert len(lines) == 2
    assert f"| {reference.NAME} 24  gap  20.000 %" in lines[0]
    solvers = [(run["solver"], run["seed"]) for run in json.loads(kept.read_text())]
    assert solvers == [("georoute", 0), ("georoute", 1), (reference.NAME, 0)]
    tours = {frozenset(line.split()) for line in (solved / "sides.sol").read_text().splitlines()}
    assert tours == {frozenset("123"), frozenset("145")}
    assert main(call) == 0
    assert capsys.readouterr().out.splitlines() == lines


@pytest.mark.source("OR-Tools (general routing search): one base, one kind of shift, no windows")
def test_the_reference_refuses_what_it_is_not_told_to_model() -> None:
    problem = CapacitatedInstance("sides", TWO_SIDES, rounded=True).problem()
    shifts = problem.shifts
    elsewhere = replace(problem, shifts=shifts._replace(end_place=shifts.end_place + 1))
    longer = shifts.limit_ms + np.arange(problem.shift_count)
    mixed = replace(problem, shifts=shifts._replace(limit_ms=longer))
    for other in (elsewhere, mixed):
        with pytest.raises(ValueError, match="one base"):
            reference.solve(other, seconds=0.1)


@pytest.mark.benchmarks
@pytest.mark.source(CHRISTOFIDES)
def test_published_tours_cost_what_is_published(benchmark_sets: Path) -> None:
    instance = read_exact(benchmark_sets / "cmt-cvrp" / "instances" / "CMT1.vrp")
    assert isinstance(instance, CapacitatedInstance)
    tours = [Tour(places=(51, *map(int, line.split()), 51)) for line in LEAST]
    assert instance.violations(tours) == ()
    assert round(instance.cost(tours), 2) == 524.61


@pytest.mark.benchmarks
@pytest.mark.source("the instance files' own DIMENSION, and the fleets of the best known solutions")
@pytest.mark.parametrize("name", ["cmt-cvrp", "golden-cvrp", "uchoa-x-cvrp"])
def test_every_published_instance_is_read_and_can_be_served(
    name: str, benchmark_sets: Path
) -> None:
    folder = benchmark_sets / name
    found = chosen_instances(folder, name)
    assert len(found) == len(list((folder / "instances").glob(READERS[name][0])))
    for instance in found:
        assert isinstance(instance, CapacitatedInstance)
        plain = [Tour(places=places) for places in instance.plain_tours()]
        assert instance.violations(plain) == ()
        header = (folder / "instances" / f"{instance.name}.vrp").read_text()
        dimension = re.search(r"DIMENSION\s*:\s*(\d+)", header)
        assert dimension is not None
        assert instance.size == int(dimension[1]) - 1


@pytest.mark.benchmarks
@pytest.mark.slow
@pytest.mark.source(CHRISTOFIDES)
@pytest.mark.source("OR-Tools (general routing search) in the same run")
def test_a_published_instance_within_a_second(
    benchmark_sets: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    call = ["cmt-cvrp", "--instances", "CMT1", "--data", str(benchmark_sets), "--seconds", "1"]
    assert main([*call, "--reference"]) == 0
    found = CLOSING_BESIDE.fullmatch(capsys.readouterr().out.splitlines()[-1])
    assert found is not None
    name, count, mean, worst, violations, *others = found.groups()
    assert (name, count, violations) == ("cmt-cvrp", "1", "0")
    assert -0.01 <= float(mean) == float(worst) <= 2.0
    assert others[0] == "1"
    assert others[3] == "0"
    assert float(others[1]) >= -0.01
