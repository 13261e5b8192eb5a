"""What README says is what the program does."""

from __future__ import annotations

import re
from pathlib import Path

import pytest

from georoute.cli.app import app
from georoute.domain.cautions import LAW_PREVAILS
from tests.docs import README, renewed

TEXT = README.read_text("utf-8")


def test_the_tables_of_readme_are_those_of_the_program() -> None:
    assert renewed(TEXT) == TEXT, "run: python -m tests.docs --write"


def test_readme_carries_the_caution() -> None:
    plain = " ".join(line.lstrip("> ") for line in TEXT.replace("**", "").splitlines())
    assert LAW_PREVAILS in " ".join(plain.split())


def test_every_command_stands_in_readme_and_has_a_help_text() -> None:
    for command in app.registered_commands:
        assert command.callback is not None
        name = command.name or command.callback.__name__
        assert command.callback.__doc__
        assert f"georoute {name}" in TEXT


def test_the_two_commands_stand_at_the_top() -> None:
    blocks = re.findall(r"```sh\n(.*?)```", TEXT, re.DOTALL)
    assert "georoute demo" in blocks[0]
    assert blocks[1].strip().endswith("-m pytest")


@pytest.mark.slow
def test_the_python_example_of_readme_runs(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    demo = Path(__file__).parents[1] / "data" / "demo"
    for name in ("programme.toml", "register.csv"):
        (tmp_path / name).write_bytes((demo / name).read_bytes())
    monkeypatch.chdir(tmp_path)
    (example,) = re.findall(r"```python\n(.*?)```", TEXT, re.DOTALL)
    names: dict[str, object] = {}
    exec(compile(example, "README.md", "exec"), names)  # noqa: S102 - the example is ours
    assert (tmp_path / "plan.gpkg").is_file()
    assert (tmp_path / "maps" / "index.html").is_file()
    assert "2027-03-01" in capsys.readouterr().out
    layers = names["layers"]
    assert isinstance(layers, dict)
    assert {"sites", "stops", "legs", "days", "bases"} <= set(layers)
