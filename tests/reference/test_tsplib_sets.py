"""The benchmark runner, and what the engine reaches on the published sets within seconds."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.benchmarks.instance import Tour
from tests.benchmarks.runner import chosen_instances, main
from tests.benchmarks.tsplib import TsplibInstance, full_matrix

TSPLIB = "G. Reinelt, TSPLIB, ORSA Journal on Computing 3 (1991) 376-384; TSPLIB95 list of optima"
SQUARE = """NAME: square
DIMENSION: 4
EDGE_WEIGHT_TYPE: {kind}
NODE_COORD_SECTION
1 0 0
2 10 0.4
3 10 10
4 0 10
EOF
"""


def _set_folder(data: Path, files: dict[str, str], best: dict[str, float]) -> None:
    folder = data / "tsplib95-tsp"
    (folder / "instances").mkdir(parents=True)
    for name, text in files.items():
        (folder / "instances" / f"{name}.tsp").write_text(text)
    rows = "".join(f"{name},{value}\n" for name, value in best.items())
    (folder / "best_known.csv").write_text("instance,best_known\n" + rows)


@pytest.mark.source(TSPLIB)
def test_distances_of_the_format() -> None:
    def distance(kind: str, i: int, j: int) -> float:
        sections = {"NODE_COORD_SECTION": [1.0, 0, 0, 2, 10, 0.4, 3, 10, 10, 4, 0, 10]}
        header = {"DIMENSION": "4", "EDGE_WEIGHT_TYPE": kind}
        return TsplibInstance("square", header, sections).distance(i, j)

    assert distance("EUC_2D", 1, 3) == 14
    assert distance("CEIL_2D", 1, 3) == 15
    assert distance("CEIL_2D", 1, 2) == 11
    assert distance("ATT", 1, 3) == 5  # the root of 20 is 4.47; rounded down it is raised
    with pytest.raises(ValueError, match="XRAY1"):
        distance("XRAY1", 1, 2)


@pytest.mark.source(TSPLIB)
def test_layouts_of_the_format_give_one_matrix() -> None:
    wanted = [[0.0, 1, 2], [1, 0, 3], [2, 3, 0]]
    assert full_matrix([0, 1, 2, 1, 0, 3, 2, 3, 0], "FULL_MATRIX", 3) == wanted
    assert full_matrix([0, 1, 0, 2, 3, 0], "LOWER_DIAG_ROW", 3) == wanted
    assert full_matrix([1, 2, 3], "LOWER_ROW", 3) == wanted
    assert full_matrix([0, 1, 2, 0, 3, 0], "UPPER_DIAG_ROW", 3) == wanted
    assert full_matrix([1, 2, 3], "UPPER_ROW", 3) == wanted


@pytest.mark.source("common practice: a tour visits each node once and comes back")
def test_broken_tours_are_named() -> None:
    sections = {"NODE_COORD_SECTION": [1.0, 0, 0, 2, 10, 0.4, 3, 10, 10, 4, 0, 10]}
    square = TsplibInstance("square", {"DIMENSION": "4", "EDGE_WEIGHT_TYPE": "EUC_2D"}, sections)
    assert square.violations((Tour(places=(1, 2, 3, 4, 1)),)) == ()
    assert len(square.violations((Tour(places=(1, 2, 3, 1)),))) == 1
    assert len(square.violations((Tour(places=(1, 2, 2, 3, 4, 1)),))) == 1
    assert len(square.violations((Tour(places=(1, 2, 3, 4)),))) == 2
    assert len(square.violations((Tour(places=(1, 2, 3, 4, 5, 1)),))) == 1
    assert len(square.violations(())) == 1


@pytest.mark.source("common practice: gap = value / best known - 1")
def test_the_runner_prints_keeps_and_resumes(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    _set_folder(
        tmp_path,
        {"one": SQUARE.format(kind="EUC_2D"), "two": SQUARE.format(kind="CEIL_2D")},
        {"one": 40.0, "two": 40.0},
    )
    kept, solved = tmp_path / "runs.json", tmp_path / "solved"
    call = ["tsplib95-tsp", "--data", str(tmp_path), "--seconds", "0.05", "--seeds", "2"]
    call += ["--json", str(kept), "--solutions", str(solved)]
    assert main(call) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[-1] == "tsplib95-tsp: 2 instances, mean gap 1.250 %, worst 2.500 %, violations 0"
    assert len(lines) == 3
    assert len(json.loads(kept.read_text())) == 4
    tour = [int(place) for place in (solved / "one.sol").read_text().split()]
    assert tour in ([1, 2, 3, 4, 1], [1, 4, 3, 2, 1])
    before = kept.stat().st_mtime_ns
    assert main(call) == 0
    assert kept.stat().st_mtime_ns == before
    assert capsys.readouterr().out.splitlines() == lines
    assert main(["tsplib95-tsp", "--data", str(tmp_path), "--instances", "none"]) == 2


@pytest.mark.source("common practice: a sample spread evenly over the sorted names")
def test_core_is_spread_over_the_names(tmp_path: Path) -> None:
    text = SQUARE.format(kind="EUC_2D")
    _set_folder(tmp_path, {f"i{k:02}": text for k in range(11)}, {})
    found = chosen_instances(tmp_path / "tsplib95-tsp", "tsplib95-tsp", core=True)
    assert [item.name for item in found] == ["i00", "i02", "i04", "i06", "i08", "i10"]
    assert chosen_instances(tmp_path / "tsplib95-tsp", "tsplib95-tsp", most=3) == []


@pytest.mark.benchmarks
@pytest.mark.slow
@pytest.mark.source(TSPLIB)
@pytest.mark.parametrize(
    ("options", "mean_most", "worst_most"),
    [
        (("tsplib95-tsp", "--core", "--max-n", "1002"), 2.0, 5.0),
        (("tsplib95-atsp",), 3.0, 5.0),
    ],
)
def test_published_sets_within_two_seconds_an_instance(
    options: tuple[str, ...],
    mean_most: float,
    worst_most: float,
    benchmark_sets: Path,
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert main([*options, "--data", str(benchmark_sets), "--seconds", "2"]) == 0
    words = capsys.readouterr().out.splitlines()[-1].split()
    assert float(words[words.index("gap") + 1]) <= mean_most
    assert float(words[words.index("worst") + 1]) <= worst_most
