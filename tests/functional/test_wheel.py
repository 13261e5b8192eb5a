"""The wheel, installed outside the source tree, holds all it needs to run the demo."""

from __future__ import annotations

import os
import subprocess
import sys
import zipfile
from pathlib import Path

import pytest

from tests.house_checks import ROOT

pytestmark = pytest.mark.slow

NEEDED = {
    "georoute/py.typed",
    "georoute/_data/LICENCES.md",
    "georoute/_data/la_serena_coquimbo.osm.pbf",
    "georoute/_data/demo/programme.toml",
    "georoute/_data/demo/register.csv",
    "georoute/_data/demo/register_dirty.csv",
}


def run(command: list[str], *, folder: Path, **variables: str) -> subprocess.CompletedProcess[str]:
    """Run a command with the environment of the tests plus the variables."""
    return subprocess.run(
        command,
        cwd=folder,
        env={**os.environ, **variables},
        capture_output=True,
        text=True,
        check=False,
    )


@pytest.fixture(scope="module")
def wheel(tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("dist")
    build = [sys.executable, "-m", "build", "--wheel", "--no-isolation", "--outdir", str(folder)]
    done = run([*build, str(ROOT)], folder=folder)
    assert done.returncode == 0, done.stdout + done.stderr
    (path,) = folder.glob("georoute-*.whl")
    return path


@pytest.fixture(scope="module")
def installed(wheel: Path, tmp_path_factory: pytest.TempPathFactory) -> Path:
    folder = tmp_path_factory.mktemp("installed")
    pip = [sys.executable, "-m", "pip", "install", "--no-deps", "--no-compile", "--quiet"]
    done = run([*pip, "--target", str(folder), str(wheel)], folder=folder)
    assert done.returncode == 0, done.stdout + done.stderr
    return folder


def package_files() -> set[str]:
    """Return every file of the package in the source tree that is no by-product."""
    return {
        path.relative_to(ROOT).as_posix()
        for path in (ROOT / "georoute").rglob("*")
        if path.is_file() and "__pycache__" not in path.parts
    }


def test_the_wheel_holds_the_package_its_pages_and_its_data(wheel: Path) -> None:
    with zipfile.ZipFile(wheel) as archive:
        names = set(archive.namelist())
    assert NEEDED - names == set()
    assert package_files() - names == set()
    assert [name for name in names if "__pycache__" in name or name.endswith(".pyc")] == []
    assert [name for name in names if name.startswith(("tests/", "data/", "maps/"))] == []


def test_the_installed_wheel_plans_and_publishes_the_demo(installed: Path, tmp_path: Path) -> None:
    where = "import georoute; print(georoute.__file__)"
    found = run([sys.executable, "-P", "-c", where], folder=tmp_path, PYTHONPATH=str(installed))
    assert Path(found.stdout.strip()).is_relative_to(installed)

    command = [sys.executable, "-P", "-m", "georoute"]
    done = run([*command, "demo", "office"], folder=tmp_path, PYTHONPATH=str(installed))
    assert done.returncode == 0, done.stdout + done.stderr
    written = {path.name for path in (tmp_path / "office").iterdir()}
    assert {"programme.toml", "register.csv", "plan.gpkg", "maps"} <= written
    assert (tmp_path / "office" / "maps" / "index.html").stat().st_size > 0

    plan = str(tmp_path / "office" / "plan.gpkg")
    audit = run([*command, "check", plan], folder=tmp_path, PYTHONPATH=str(installed))
    assert audit.returncode == 0, audit.stdout + audit.stderr
