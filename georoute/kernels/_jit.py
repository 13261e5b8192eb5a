"""The one decorator through which every kernel is compiled, and where compiled kernels are kept."""

from __future__ import annotations

import hashlib
import os
import re
import sys
from collections.abc import Callable
from functools import cache
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


_IMPORT = re.compile(r"^from georoute\.kernels\.(\w+) import", re.MULTILINE)
_HERE = Path(__file__).parent
_OWN_CHOICE = numba.core.config.CACHE_DIR  # type: ignore[attr-defined]  # made at run time
"""A folder that the user chose for everything the compiler keeps; empty: none."""


@cache
def _sources(module: str) -> frozenset[str]:
    """Return a module of kernels and all those it imports, directly or not."""
    found: set[str] = set()
    waiting = [module]
    while waiting:
        name = waiting.pop()
        if name not in found:
            found.add(name)
            waiting += _IMPORT.findall((_HERE / f"{name}.py").read_text(encoding="utf-8"))
    return frozenset(found)


@cache
def _fingerprint(module: str) -> str:
    """Return a hash of everything the compiled kernels of a module depend on.

    The compiler's own cache looks at the file of a function only: it would keep a kernel whose
    callee in another file has changed, and stumble over classes that are gone.
    """
    told = hashlib.sha256(f"{numba.__version__} {np.__version__} {sys.version} {_HERE}".encode())
    for name in sorted({*_sources(module), "_jit"}):
        told.update((_HERE / f"{name}.py").read_bytes())
    return told.hexdigest()[:16]


@cache
def _folder(module: str) -> str:
    """Return where the compiled kernels of a module are kept; empty: where the compiler likes."""
    if _OWN_CHOICE:
        return str(_OWN_CHOICE)
    chosen = os.environ.get("GEOROUTE_CACHE")
    home = Path(chosen) if chosen else platformdirs.user_cache_path("georoute", appauthor=False)
    folder = home / "kernels" / _fingerprint(module)
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError:
        return ""  # a home that cannot be written to: the compiler looks for another place
    return str(folder) if os.access(folder, os.W_OK) else ""


def compiled_before() -> bool:
    """Tell whether the kernels of the search were kept by an earlier run of these very sources."""
    folder = _folder("annealing")
    return bool(folder) and any(Path(folder).glob("*/annealing.anneal*"))


def kernel(func: Callable[P, R]) -> Callable[P, R]:
    """Compile ``func`` on its first call, cached on disk, releasing the interpreter lock.

    Never with ``fastmath``: it makes ``isinf(inf)`` false, and unreachable pairs are infinite.
    """
    # The compiler reads its setting, once for each function, when it is told to keep it.
    numba.core.config.CACHE_DIR = _folder(func.__module__.rpartition(".")[2])  # type: ignore[attr-defined]  # see above
    return cast("Callable[P, R]", numba.njit(cache=True, nogil=True)(func))
