"""A writer killed at any moment leaves a plan file that opens."""

from __future__ import annotations

import random
import signal
import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path

import pytest

from georoute.files.atomic import TEMPORARY_PREFIX
from georoute.store import read_plan, write_plan
from tests.store_helpers import example_plan

ROOT = Path(__file__).resolve().parents[3]

WRITER = """
import itertools, signal, sys
from dataclasses import replace
from georoute.store import write_plan
from tests.store_helpers import example_plan
plan = example_plan()
# Where a shell started the tests in the background, children would not hear it.
signal.signal(signal.SIGINT, signal.default_int_handler)
print("ready", flush=True)
for number in itertools.count():
    write_plan(replace(plan, plan_id=f"run {number}"), sys.argv[1])
"""


def _kill_a_writer(path: Path, delay_s: float, how: signal.Signals) -> None:
    writer = subprocess.Popen(
        [sys.executable, "-c", WRITER, str(path)],
        cwd=ROOT,
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        text=True,
    )
    with writer:
        assert writer.stdout is not None
        assert writer.stdout.readline() == "ready\n"
        time.sleep(delay_s)
        writer.send_signal(how)
    assert writer.returncode != 0


@pytest.mark.slow
def test_killed_writer_leaves_a_plan_file_that_opens(tmp_path: Path) -> None:
    path, plan = tmp_path / "week.gpkg", example_plan()
    write_plan(plan, path)
    moments = random.Random(20_261_025)  # noqa: S311 - moments, not secrets
    torn = 0
    for _ in range(10):
        _kill_a_writer(path, moments.uniform(0.0, 0.12), signal.SIGKILL)
        found = read_plan(path)
        assert replace(found, plan_id=plan.plan_id) == plan
        torn += any(p.name.startswith(TEMPORARY_PREFIX) for p in tmp_path.iterdir())
    assert torn > 0, "no kill fell into a write; the test shows nothing"
    write_plan(plan, path)
    assert [p.name for p in tmp_path.iterdir()] == ["week.gpkg"]


@pytest.mark.slow
def test_interrupted_writer_leaves_nothing_behind(tmp_path: Path) -> None:
    path, plan = tmp_path / "week.gpkg", example_plan()
    write_plan(plan, path)
    moments = random.Random(7)  # noqa: S311 - moments, not secrets
    for _ in range(3):
        _kill_a_writer(path, moments.uniform(0.0, 0.12), signal.SIGINT)
        assert replace(read_plan(path), plan_id=plan.plan_id) == plan
        assert [p.name for p in tmp_path.iterdir()] == ["week.gpkg"]
