"""A file is written wholly or not at all, whatever happens in between."""

from __future__ import annotations

import errno
import os
import stat
import subprocess
import sys
from pathlib import Path

import pytest

from georoute.errors import OutputError
from georoute.files import atomic_path, atomic_write_bytes
from georoute.files.atomic import TEMPORARY_PREFIX, clear_stale


@pytest.fixture
def target(tmp_path: Path) -> Path:
    path = tmp_path / "plan.gpkg"
    path.write_bytes(b"old")
    return path


def left_behind(folder: Path) -> list[str]:
    return [p.name for p in folder.iterdir() if p.name.startswith(TEMPORARY_PREFIX)]


def test_new_content_replaces_the_old(target: Path) -> None:
    atomic_write_bytes(target, b"new")
    assert target.read_bytes() == b"new"
    assert left_behind(target.parent) == []


def test_missing_folders_are_made(tmp_path: Path) -> None:
    atomic_write_bytes(tmp_path / "a" / "b" / "c.txt", b"x")
    assert (tmp_path / "a" / "b" / "c.txt").read_bytes() == b"x"


def test_temporary_path_is_in_the_same_folder_with_the_same_suffix(target: Path) -> None:
    with atomic_path(target) as temporary:
        assert temporary.parent == target.parent
        assert temporary.suffix == ".gpkg"
        assert temporary.name.startswith(TEMPORARY_PREFIX)
        assert not temporary.exists()
        temporary.write_bytes(b"new")
        assert target.read_bytes() == b"old"
    assert target.read_bytes() == b"new"


@pytest.mark.parametrize("error", [ValueError("no"), KeyboardInterrupt(), SystemExit(1)])
def test_failure_leaves_the_old_file_and_nothing_else(target: Path, error: BaseException) -> None:
    def write() -> None:
        with atomic_path(target) as temporary:
            temporary.write_bytes(b"half")
            temporary.with_name(temporary.name + "-journal").write_bytes(b"log")
            raise error

    with pytest.raises(type(error)):
        write()
    assert target.read_bytes() == b"old"
    assert left_behind(target.parent) == []


def test_verify_can_refuse(target: Path) -> None:
    def refuse(made: Path) -> None:
        assert made.read_bytes() == b"new"
        raise OutputError("refused")

    with pytest.raises(OutputError, match="refused"), atomic_path(target, verify=refuse) as made:
        made.write_bytes(b"new")
    assert target.read_bytes() == b"old"
    assert left_behind(target.parent) == []


def test_writing_nothing_is_an_error(target: Path) -> None:
    with pytest.raises(OutputError, match="nothing was written"), atomic_path(target):
        pass
    assert target.read_bytes() == b"old"


def test_folder_at_the_target_is_named(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="is a folder"):
        atomic_write_bytes(tmp_path, b"x")


def test_file_in_place_of_a_folder_is_named(target: Path) -> None:
    with pytest.raises(OutputError, match="path is a file"):
        atomic_write_bytes(target / "map.html", b"x")
    assert target.read_bytes() == b"old"


@pytest.mark.parametrize(
    ("number", "words"),
    [
        (errno.ENOSPC, "disk is full.*free some space"),
        (errno.EDQUOT, "disk is full"),
        (errno.EROFS, "may not be written to"),
        (errno.EACCES, "may not be written to"),
        (errno.EIO, "untouched"),
    ],
)
def test_errors_of_the_system_are_explained(target: Path, number: int, words: str) -> None:
    def write() -> None:
        with atomic_path(target) as temporary:
            temporary.write_bytes(b"half")
            raise OSError(number, os.strerror(number))

    with pytest.raises(OutputError, match=words):
        write()
    assert target.read_bytes() == b"old"
    assert left_behind(target.parent) == []


def test_full_disk_is_really_met(tmp_path: Path) -> None:
    """/dev/full of Linux answers every write with "no space left"."""
    if not Path("/dev/full").exists():
        pytest.skip("only Linux has /dev/full")
    target = tmp_path / "plan.gpkg"
    target.write_bytes(b"old")

    def write() -> None:
        with atomic_path(target), Path("/dev/full").open("wb", buffering=0) as stream:
            stream.write(b"x")

    with pytest.raises(OutputError, match="disk is full"):
        write()
    assert target.read_bytes() == b"old"


def test_too_long_a_name_is_explained(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match="choose a shorter name"):
        atomic_write_bytes(tmp_path / ("n" * 300), b"x")
    assert left_behind(tmp_path) == []


def test_error_about_another_file_is_passed_on(target: Path) -> None:
    def write() -> None:
        with atomic_path(target):
            (target.parent / "absent.csv").read_bytes()

    with pytest.raises(FileNotFoundError, match=r"absent\.csv"):
        write()
    assert target.read_bytes() == b"old"


def test_permissions_of_the_old_file_are_kept(target: Path) -> None:
    target.chmod(0o640)
    atomic_write_bytes(target, b"new")
    assert stat.S_IMODE(target.stat().st_mode) == 0o640


def test_new_file_follows_the_mask_of_the_user(tmp_path: Path) -> None:
    mask = os.umask(0o027)
    try:
        atomic_write_bytes(tmp_path / "new.txt", b"x")
    finally:
        os.umask(mask)
    assert stat.S_IMODE((tmp_path / "new.txt").stat().st_mode) == 0o640


def test_symbolic_link_is_followed(target: Path, tmp_path: Path) -> None:
    link = tmp_path / "latest.gpkg"
    link.symlink_to(target)
    atomic_write_bytes(link, b"new")
    assert link.is_symlink()
    assert target.read_bytes() == b"new"


def _killed_writer(target: Path) -> None:
    """Start a process that begins to write ``target`` and is killed in the middle."""
    code = (
        "import os, signal, sys\n"
        "from georoute.files import atomic_path\n"
        "with atomic_path(sys.argv[1]) as made:\n"
        "    made.write_bytes(b'half')\n"
        "    made.with_name(made.name + '-journal').write_bytes(b'log')\n"
        "    os.kill(os.getpid(), signal.SIGKILL)\n"
    )
    done = subprocess.run([sys.executable, "-c", code, str(target)], check=False)
    assert done.returncode == -9


def test_leftovers_of_a_killed_run_are_cleared_by_the_next(target: Path) -> None:
    _killed_writer(target)
    assert target.read_bytes() == b"old"
    assert len(left_behind(target.parent)) == 2
    atomic_write_bytes(target.parent / "other.gpkg", b"x")
    assert len(left_behind(target.parent)) == 2, "leftovers of another file are not ours"
    atomic_write_bytes(target, b"new")
    assert left_behind(target.parent) == []


def test_files_of_a_running_writer_are_left_alone(target: Path) -> None:
    with atomic_path(target) as first:
        first.write_bytes(b"first")
        assert clear_stale(target) == ()
        with atomic_path(target) as second:
            second.write_bytes(b"second")
        assert first.read_bytes() == b"first"
    assert target.read_bytes() == b"first"


def test_files_of_another_machine_are_left_alone(target: Path) -> None:
    _killed_writer(target)
    for name in left_behind(target.parent):
        parts = name.split(".")
        parts[3] = "0" * 10
        (target.parent / name).rename(target.parent / ".".join(parts))
    assert clear_stale(target) == ()
    assert len(left_behind(target.parent)) == 2
