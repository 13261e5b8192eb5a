"""Hashes of files, by which a plan names the inputs it was made from."""

from __future__ import annotations

import hashlib
from pathlib import Path

from georoute.errors import InputError

__all__ = ["sha256_of"]


def sha256_of(path: Path | str) -> str:
    """Return the SHA-256 of a file's bytes as 64 hexadecimal digits.

    Raises
    ------
    InputError
        The file is missing or cannot be read.
    """
    try:
        with Path(path).open("rb") as stream:
            return hashlib.file_digest(stream, "sha256").hexdigest()
    except OSError as error:
        msg = f"{path}: cannot be read: {error.strerror or error}; check the path and the rights"
        raise InputError(msg) from error
