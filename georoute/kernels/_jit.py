"""The one decorator through which every kernel is compiled."""

from __future__ import annotations

from collections.abc import Callable
from typing import ParamSpec, TypeAlias, TypeVar, cast

import numba
import numpy as np

__all__ = ["Float", "Int", "kernel"]

Int: TypeAlias = int | np.int64
Float: TypeAlias = float | np.float64

P = ParamSpec("P")
R = TypeVar("R")


def kernel(func: Callable[P, R]) -> Callable[P, R]:
    """Compile ``func`` on its first call, cached on disk, releasing the interpreter lock.

    Never with ``fastmath``: it makes ``isinf(inf)`` false, and unreachable pairs are infinite.
    """
    return cast("Callable[P, R]", numba.njit(cache=True, nogil=True)(func))
