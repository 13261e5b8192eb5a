"""Built roads kept and found again, also when the kept file was damaged."""

from __future__ import annotations

import os
from dataclasses import dataclass, fields
from pathlib import Path

import numpy as np
import pytest

from georoute.errors import InputError
from georoute.roads.cache import KEPT, BuiltRoads, cached_roads, settings_key
from georoute.roads.model import RoadTable
from georoute.roads.network import RoadNetwork
from tests.roads_helpers import random_roads


class Reader:
    """Counts how often the source is read."""

    def __init__(self, seed: int = 4) -> None:
        self.times = 0
        self.table = random_roads(seed)

    def __call__(self) -> RoadTable:
        self.times += 1
        return self.table


@pytest.fixture
def source(tmp_path: Path) -> Path:
    path = tmp_path / "roads.osm"
    path.write_bytes(b"a map")
    return path


def same(a: RoadNetwork | RoadTable, b: RoadNetwork | RoadTable) -> None:
    for field in fields(a):
        one, other = getattr(a, field.name), getattr(b, field.name)
        if isinstance(one, np.ndarray):
            assert one.dtype == other.dtype, field.name
            assert np.array_equal(one, other), field.name
        elif isinstance(one, RoadTable):
            same(one, other)
        else:
            assert one == other, field.name


def files_in(folder: Path) -> list[Path]:
    return sorted(folder.iterdir()) if folder.is_dir() else []


def test_the_second_time_nothing_is_read_or_built(source: Path, tmp_path: Path) -> None:
    reader, folder = Reader(), tmp_path / "kept"
    first = cached_roads(source, reader, settings="", folder=folder)
    second = cached_roads(source, reader, settings="", folder=folder)
    assert (first.kept, second.kept, reader.times) == (False, True, 1)
    same(first.network, second.network)
    assert second.hierarchy._fields
    for name in second.hierarchy._fields:
        one, other = getattr(first.hierarchy, name), getattr(second.hierarchy, name)
        assert np.array_equal(one, other), name
    assert len(files_in(folder)) == 1


def test_another_source_or_setting_is_another_network(source: Path, tmp_path: Path) -> None:
    reader, folder = Reader(), tmp_path / "kept"
    cached_roads(source, reader, settings="a", folder=folder)
    cached_roads(source, reader, settings="b", folder=folder)
    source.write_bytes(b"another map")
    cached_roads(source, reader, settings="b", folder=folder)
    assert reader.times == 3


def test_every_damage_is_noticed_told_and_mended(source: Path, tmp_path: Path) -> None:
    reader, folder = Reader(), tmp_path / "kept"
    first = cached_roads(source, reader, settings="", folder=folder)
    (path,) = files_in(folder)
    whole = path.read_bytes()
    draw = np.random.default_rng(1)
    damaged = [b"", b"no archive", whole[: len(whole) // 2], whole[:-30], whole[100:]]
    damaged += [
        whole[:at] + bytes([whole[at] ^ (1 << at % 8)]) + whole[at + 1 :]
        for at in draw.integers(0, len(whole), 60).tolist()
    ]
    for content in damaged:
        path.write_bytes(content)
        mended = cached_roads(source, reader, settings="", folder=folder)
        codes = [remark.code for remark in mended.network.remarks]
        assert mended.kept or codes[-1] == "cache_damaged"
        assert mended.kept == ("cache_damaged" not in codes)
        if mended.kept:  # a bit that nobody reads, such as a date in the archive
            same(first.network, mended.network)
        else:
            assert path.read_bytes() != content
            assert cached_roads(source, reader, settings="", folder=folder).kept
        path.write_bytes(whole)
    assert reader.times > 30


def test_an_unwritable_cache_is_a_remark(source: Path, tmp_path: Path) -> None:
    (tmp_path / "file").write_text("in the way")
    built = cached_roads(source, Reader(), settings="", folder=tmp_path / "file" / "kept")
    assert isinstance(built, BuiltRoads)
    assert [r.code for r in built.network.remarks][-1] == "cache_missing"


def test_nothing_is_left_of_a_build_that_failed(source: Path, tmp_path: Path) -> None:
    def fail() -> RoadTable:
        raise InputError("truncated")

    with pytest.raises(InputError, match="truncated"):
        cached_roads(source, fail, settings="", folder=tmp_path / "kept")
    assert files_in(tmp_path / "kept") == []


def test_the_oldest_networks_go(source: Path, tmp_path: Path) -> None:
    folder = tmp_path / "kept"
    for k in range(KEPT + 2):
        cached_roads(source, Reader(), settings=str(k), folder=folder)
        for file in files_in(folder):
            told = file.stat()
            os.utime(file, ns=(told.st_atime_ns - 10**9, told.st_mtime_ns - 10**9))
    assert len(files_in(folder)) == KEPT
    assert cached_roads(source, Reader(), settings=str(KEPT + 1), folder=folder).kept
    assert not cached_roads(source, Reader(), settings="0", folder=folder).kept


@dataclass(frozen=True)
class Profile:
    speeds: dict[str, float]
    country: str = "CL"


def test_settings_are_told_apart_by_what_they_say() -> None:
    a = settings_key(Profile(speeds={"primary": 80.0, "residential": 30.0}))
    b = settings_key(Profile(speeds={"residential": 30.0, "primary": 80.0}))
    c = settings_key(Profile(speeds={"residential": 31.0, "primary": 80.0}))
    assert a == b != c
    assert settings_key(1, 2) != settings_key(12)
