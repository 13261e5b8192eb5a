"""The one decorator through which every kernel is compiled, and where compiled kernels are kept."""

from __future__ import annotations

import hashlib
import os
import sys
from collections.abc import Callable
from pathlib import Path
from typing import ParamSpec, TypeAlias, TypeVar, cast

import numba
import numba.core.config
import numpy as np
import platformdirs

__all__ = ["Float", "Int", "compiled_before", "kernel"]

Int: TypeAlias = int | np.int64
Float: TypeAlias = float | np.float64

P = ParamSpec("P")
R = TypeVar("R")


def _fingerprint() -> str:
    """Return a hash of everything compiled kernels depend on.

    The compiler's own cache looks at the file of a function only: it would keep a kernel whose
    callee in another file has changed, and stumble over classes that are gone.
    """
    here = Path(__file__).parent
    told = hashlib.sha256(f"{numba.__version__} {np.__version__} {sys.version} {here}".encode())
    for source in sorted(here.glob("*.py")):
        told.update(source.read_bytes())
    return told.hexdigest()[:16]


def _keep_kernels() -> None:
    """Point the compiler's cache at a folder of the user's that belongs to these very sources."""
    # The settings of the compiler are made at run time, from the environment.
    if numba.core.config.CACHE_DIR:  # type: ignore[attr-defined]  # see above
        return
    chosen = os.environ.get("GEOROUTE_CACHE")
    home = Path(chosen) if chosen else platformdirs.user_cache_path("georoute", appauthor=False)
    folder = home / "kernels" / _fingerprint()
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError:
        return  # a home that cannot be written to: the compiler looks for another place
    if os.access(folder, os.W_OK):
        numba.core.config.CACHE_DIR = str(folder)  # type: ignore[attr-defined]  # see above


_keep_kernels()


def compiled_before() -> bool:
    """Tell whether kernels of these very sources were kept by an earlier run."""
    folder = numba.core.config.CACHE_DIR  # type: ignore[attr-defined]  # made at run time
    return bool(folder) and any(Path(folder).glob("*/annealing.anneal*"))


def kernel(func: Callable[P, R]) -> Callable[P, R]:
    """Compile ``func`` on its first call, cached on disk, releasing the interpreter lock.

    Never with ``fastmath``: it makes ``isinf(inf)`` false, and unreachable pairs are infinite.
    """
    return cast("Callable[P, R]", numba.njit(cache=True, nogil=True)(func))
