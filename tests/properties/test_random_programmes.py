"""Small random programmes from files to plan file; the best plan of some by trying everything."""

from __future__ import annotations

from pathlib import Path

import pytest

from georoute.domain.programme import TravelMethod
from georoute.domain.run import Aim
from tests.days_helpers import Recipe, best_by_brute_force, random_problem
from tests.examples import at_most
from tests.random_programmes import main, passes, summary
from tests.random_programmes_brute import best_plan
from tests.random_programmes_draw import MOST_SHIFTS, MOST_VISITS, REGIONS
from tests.random_programmes_judge import Verdict, judge, read

pytestmark = pytest.mark.slow

FEW = at_most(60)
OTHER_SEEDS = 1_000_000
"""Seeds far from those of the long run, so that the two together see more."""
TINY = Recipe(
    visits=4,
    shifts=2,
    paid_min=(120, 240),
    windowed=0.5,
    double_windowed=0.3,
    loaded=0.4,
    must=0.2,
    unreachable=0.1,
)


def test_small_programmes_are_planned_without_a_breach(tmp_path: Path) -> None:
    verdicts = [
        judge(OTHER_SEEDS + k, tmp_path, effort="quick", brute=k % 5 == 0, round_trip=k % 20 == 0)
        for k in range(FEW)
    ]
    assert [v for v in verdicts if v.trouble or v.beside_brute not in {"", "equal"}] == []
    assert sum(v.placed for v in verdicts) >= FEW


@pytest.mark.parametrize("seed", range(at_most(12)))
def test_both_ways_of_trying_everything_agree(seed: int) -> None:
    problem = random_problem(seed, TINY)
    fewest_days = seed % 3 == 0
    assert best_plan(problem, fewest_days=fewest_days) == best_by_brute_force(
        problem, fewest_days=fewest_days
    )


def test_the_draw_repeats_itself_and_covers_the_settings(tmp_path: Path) -> None:
    drawn = [read(seed, tmp_path / "first", effort="quick") for seed in range(100)]
    _, again = read(99, tmp_path / "second", effort="quick")
    assert again.sha256 == drawn[-1][1].sha256
    assert again.visits == drawn[-1][1].visits
    programmes = [programme for programme, _ in drawn]
    visits = [visit for _, register in drawn for visit in register.visits]
    assert {p.travel.method for p in programmes} == set(TravelMethod) - {TravelMethod.ROADS}
    assert len({p.zone for p in programmes}) == len(REGIONS)
    assert {len(p.shifts()) for p in programmes} == set(range(1, MOST_SHIFTS + 1))
    assert {len(p.inspectors) for p in programmes} == {1, 2, 3}
    assert {len(register.visits) for _, register in drawn} >= set(range(1, MOST_VISITS + 1))
    for said in (
        {p.aim for p in programmes} == set(Aim),
        any(p.tariff.hour == 0 for p in programmes),
        any(i.shift_end < i.shift_start for p in programmes for i in p.inspectors),
        any(i.load_limit is not None for p in programmes for i in p.inspectors),
        any(len(visit.open_intervals) > 1 for visit in visits),
        any(visit.inspector_ids for visit in visits),
        any(visit.earliest is not None for visit in visits),
        any(visit.must for visit in visits),
        any(visit.work_s + visit.access_s == 0 for visit in visits),
    ):
        assert said


def verdict(seed: int, *, trouble: str = "", beside_brute: str = "") -> Verdict:
    return Verdict(seed=seed, visits=2, placed=1, trouble=trouble, beside_brute=beside_brute)


def test_the_summary_names_the_seeds_that_failed() -> None:
    verdicts = [
        verdict(1, beside_brute="equal"),
        verdict(2, beside_brute="worse"),
        verdict(7, trouble="violation"),
    ]
    assert summary(verdicts) == (
        "3 programmes, 3 of 6 visits placed: 1 violation (seeds 7), 0 traceback, 0 warning; "
        "2 beside brute force: 1 equal (50.0%), 1 worse (seeds 2), 0 better"
    )


@pytest.mark.parametrize(
    ("odd", "good"),
    [
        ([], True),
        ([verdict(101, beside_brute="worse")], True),
        ([verdict(101, beside_brute="worse"), verdict(102, beside_brute="worse")], False),
        ([verdict(101, beside_brute="better")], False),
        ([verdict(101, beside_brute="equal", trouble="traceback")], False),
        ([verdict(101, beside_brute="equal", trouble="violation")], False),
        ([verdict(101, beside_brute="equal", trouble="warning")], False),
    ],
)
def test_one_in_a_hundred_may_be_dearer_and_nothing_may_break(
    odd: list[Verdict], good: bool
) -> None:
    most = [verdict(k, beside_brute="equal") for k in range(100 - len(odd))]
    assert passes([*most, *odd], brute=100) is good


def test_the_command_tells_and_returns_one_seed(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    told = tmp_path / "verdicts.json"
    assert main(["--first", "3", "--folder", str(tmp_path / "files"), "--json", str(told)]) == 0
    assert "1 programmes" in capsys.readouterr().out
    assert '"beside_brute": "equal"' in told.read_text()
    assert (tmp_path / "files" / "programme.toml").is_file()
