"""The commands as a coordinator runs them: in a process of their own, on files."""

from __future__ import annotations

import json
import os
import random
import signal
import subprocess
import sys
import time
from pathlib import Path

import pytest

from georoute.domain.cautions import LAW_PREVAILS
from georoute.store import read_plan

pytestmark = pytest.mark.slow

DEMO = Path(__file__).parents[2] / "data" / "demo"
ISSUED = {"SOURCE_DATE_EPOCH": "1803456000"}


def georoute(*words: object, cwd: Path, **variables: str) -> subprocess.CompletedProcess[str]:
    return subprocess.run(
        [sys.executable, "-m", "georoute", *map(str, words)],
        cwd=cwd,
        env=os.environ | ISSUED | variables,
        capture_output=True,
        text=True,
        timeout=600,
        check=False,
    )


def copy_demo(folder: Path) -> Path:
    for name in ("programme.toml", "register.csv", "register_dirty.csv"):
        (folder / name).write_bytes((DEMO / name).read_bytes())
    return folder


@pytest.fixture(scope="module")
def planned(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A folder with the demo, planned and published."""
    folder = copy_demo(tmp_path_factory.mktemp("planned"))
    done = georoute("plan", "programme.toml", "--publish", "--json", cwd=folder)
    assert done.returncode == 0, done.stderr
    (folder / "out.json").write_text(done.stdout)
    (folder / "err.txt").write_text(done.stderr)
    return folder


def test_the_demo_is_planned_and_every_visit_is_placed_or_has_a_reason(planned: Path) -> None:
    told = json.loads((planned / "out.json").read_text())
    placed = [stop["visit_id"] for tour in told["tours"] for stop in tour["stops"]]
    left_out = [item["visit_id"] for item in told["unplaced"]]
    assert len(placed) + len(left_out) == told["visits"]
    assert len(set(placed) | set(left_out)) == told["visits"]
    assert all(item["reason"] and item["message"] for item in told["unplaced"])


def test_the_plan_passes_its_check(planned: Path) -> None:
    checked = georoute("check", "plan.gpkg", cwd=planned)
    assert checked.returncode == 0, checked.stderr
    assert "0 fault(s), 0 warning(s)" in checked.stderr


def test_search_after_the_split_never_costs_more_for_the_same_visits(planned: Path) -> None:
    stages = json.loads((planned / "out.json").read_text())["stages"]
    assert [stage["stage"] for stage in stages] == ["split", "order", "days together"]
    assert stages[1]["cost"] <= stages[0]["cost"]


def test_the_capacity_sum_comes_before_the_plan_and_the_caution_is_told(planned: Path) -> None:
    told = (planned / "err.txt").read_text()
    assert "Capacity: " in told
    assert LAW_PREVAILS in " ".join(told.split())


def test_every_page_carries_the_caution(planned: Path) -> None:
    pages = sorted((planned / "maps").glob("*.html"))
    assert len(pages) > len(read_plan(planned / "plan.gpkg").tours)
    for page in pages:
        text = page.read_text("utf-8").replace("&#39;", "'")
        assert LAW_PREVAILS in text, page.name


def test_same_inputs_seed_and_effort_give_the_same_plan_and_the_same_pages(
    planned: Path, tmp_path: Path
) -> None:
    again = copy_demo(tmp_path)
    done = georoute("plan", "programme.toml", "--publish", cwd=again)
    assert done.returncode == 0, done.stderr
    assert read_plan(again / "plan.gpkg") == read_plan(planned / "plan.gpkg")
    first = {page.name: page.read_bytes() for page in (planned / "maps").glob("*.html")}
    second = {page.name: page.read_bytes() for page in (again / "maps").glob("*.html")}
    assert first == second


def test_show_tells_the_sums_a_day_and_what_is_not_placed(planned: Path) -> None:
    sums = georoute("show", "plan.gpkg", cwd=planned)
    assert "tours" in sums.stdout
    day = georoute("show", "plan.gpkg", "--day", "2027-03-01", cwd=planned)
    assert "Monday 2027-03-01" in day.stdout
    assert "Tuesday" not in day.stdout
    missing = georoute("show", "plan.gpkg", "--unplaced", cwd=planned)
    for item in read_plan(planned / "plan.gpkg").unplaced:
        assert item.message in " ".join(missing.stdout.split())


def test_check_finds_faults_in_the_dirty_register_and_reports_them(tmp_path: Path) -> None:
    folder = copy_demo(tmp_path)
    found = georoute("check", "register_dirty.csv", "--report", "found.csv", cwd=folder)
    assert found.returncode == 3
    assert "FAULT" in found.stderr
    assert (folder / "found.csv").read_text("utf-8").count("\n") > 10


def test_a_register_with_faults_stops_the_run_before_anything_is_written(tmp_path: Path) -> None:
    folder = copy_demo(tmp_path)
    (folder / "register.csv").write_bytes((folder / "register_dirty.csv").read_bytes())
    stopped = georoute("plan", "programme.toml", cwd=folder)
    assert stopped.returncode == 3
    assert not (folder / "plan.gpkg").exists()


@pytest.mark.parametrize(
    ("words", "code"),
    [
        (["check", "absent.csv"], 3),
        (["plan", "absent.toml"], 3),
        (["show", "absent.gpkg"], 4),
        (["show", "programme.toml"], 4),
        (["plan"], 2),
        (["wander"], 2),
    ],
)
def test_what_cannot_be_done_ends_with_its_documented_code(
    words: list[str], code: int, tmp_path: Path
) -> None:
    ended = georoute(*words, cwd=copy_demo(tmp_path))
    assert ended.returncode == code, ended.stderr
    assert "Traceback" not in ended.stderr


def test_a_result_that_cannot_be_written_is_told_with_its_code(
    planned: Path, tmp_path: Path
) -> None:
    (tmp_path / "maps").write_text("a file where the folder should be")
    ended = georoute("publish", planned / "plan.gpkg", "maps", cwd=tmp_path)
    assert ended.returncode == 5, ended.stderr


def start(folder: Path, *words: str) -> subprocess.Popen[str]:
    return subprocess.Popen(
        [sys.executable, "-m", "georoute", "plan", "programme.toml", *words],
        cwd=folder,
        env=os.environ | ISSUED,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        text=True,
    )


def test_ctrl_c_ends_the_search_with_the_best_plan_so_far(planned: Path, tmp_path: Path) -> None:
    del planned  # compiled kernels are there
    folder = copy_demo(tmp_path)
    running = start(folder, "--seconds", "300")
    assert running.stderr is not None
    while not running.stderr.readline().startswith("Capacity"):
        assert running.poll() is None
    time.sleep(30)  # kernels are loaded, and the search is on its way
    running.send_signal(signal.SIGINT)
    _, told = running.communicate(timeout=120)
    assert running.returncode == 0, told
    assert read_plan(folder / "plan.gpkg").provenance.stop_rule.value == "interrupted"
    assert georoute("check", "plan.gpkg", cwd=folder).returncode == 0


def test_a_killed_run_leaves_the_previous_plan_whole(planned: Path, tmp_path: Path) -> None:
    folder = copy_demo(tmp_path)
    before = (planned / "plan.gpkg").read_bytes()
    (folder / "plan.gpkg").write_bytes(before)
    moments = random.Random(7)  # noqa: S311 - moments of a test, no secret
    for seed in range(10):
        running = start(folder, "--seed", str(seed), "--effort", "quick")
        time.sleep(moments.uniform(0.5, 6.0))
        running.kill()
        running.communicate(timeout=60)
        plan = read_plan(folder / "plan.gpkg")
        assert plan.tours
    assert georoute("check", "plan.gpkg", cwd=folder).returncode == 0


def test_help_names_every_command_and_option(tmp_path: Path) -> None:
    told = georoute("--help", cwd=tmp_path)
    assert told.returncode == 0
    for command in ("check", "plan", "show", "publish", "demo"):
        assert command in told.stdout
        assert georoute(command, "--help", cwd=tmp_path).returncode == 0
