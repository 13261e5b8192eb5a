"""Files: atomic writes, hashes, the cache folder."""

from __future__ import annotations

from georoute.files.atomic import atomic_path, atomic_write_bytes
from georoute.files.cache import cache_folder
from georoute.files.hashes import sha256_of

__all__ = ["atomic_path", "atomic_write_bytes", "cache_folder", "sha256_of"]
