"""The speed benchmark runs, compares equal things, and prints what it measured."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from tests.benchmarks import speed


def test_ratios_are_printed_and_written(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.setattr(speed, "SMALL", 40)
    file = tmp_path / "speed.json"
    assert speed.main(["--small", "--repeats", "2", "--json", str(file)]) == 0
    rows = json.loads(file.read_text(encoding="utf-8"))
    assert [row["n"] for row in rows] == [40, 40]
    for row in rows:
        assert row["times_faster"] == pytest.approx(row["reference_s"] / row["own_s"])
        assert row["largest_difference_m"] < 0.01
    printed = capsys.readouterr().out
    assert "times faster" in printed
    assert printed.endswith("speed: 2 ratios, medians of 2 runs each\n")
