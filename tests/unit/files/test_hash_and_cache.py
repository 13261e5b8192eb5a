"""Hashes of files and the cache folder."""

from __future__ import annotations

from pathlib import Path

import platformdirs
import pytest

from georoute.errors import InputError, OutputError
from georoute.files import cache_folder, sha256_of
from georoute.files.cache import CACHE_VARIABLE


@pytest.mark.parametrize(
    ("content", "digest"),
    [
        # FIPS 180-4 examples, as published by NIST (CSRC, "Example values": SHA-256).
        (b"abc", "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"),
        (
            b"abcdbcdecdefdefgefghfghighijhijkijkljklmklmnlmnomnopnopq",
            "248d6a61d20638b8e5c026930c3e6039a33ce45964ff2167f6ecedd419db06c1",
        ),
        (b"", "e3b0c44298fc1c149afbf4c8996fb92427ae41e4649b934ca495991b7852b855"),
    ],
)
def test_hash_is_that_of_the_standard(content: bytes, digest: str, tmp_path: Path) -> None:
    path = tmp_path / "register.csv"
    path.write_bytes(content)
    assert sha256_of(path) == digest


def test_missing_file_has_no_hash(tmp_path: Path) -> None:
    with pytest.raises(InputError, match=r"absent\.csv: cannot be read"):
        sha256_of(tmp_path / "absent.csv")


def test_cache_folder_can_be_chosen(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv(CACHE_VARIABLE, str(tmp_path / "cache"))
    assert cache_folder() == tmp_path / "cache"
    assert cache_folder().is_dir()


def test_cache_folder_is_the_users(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.delenv(CACHE_VARIABLE, raising=False)
    monkeypatch.setenv("XDG_CACHE_HOME", str(tmp_path))
    monkeypatch.setenv("HOME", str(tmp_path))
    folder = cache_folder()
    assert folder == platformdirs.user_cache_path("georoute", appauthor=False)
    assert folder.is_dir()


def test_cache_folder_that_cannot_be_made_is_explained(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    (tmp_path / "file").write_bytes(b"")
    monkeypatch.setenv(CACHE_VARIABLE, str(tmp_path / "file" / "cache"))
    with pytest.raises(OutputError, match=CACHE_VARIABLE):
        cache_folder()
