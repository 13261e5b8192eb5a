"""Random numbers for kernels: xoshiro256** on a state array of four 64-bit words.

D. Blackman, S. Vigna, "Scrambled linear pseudorandom number generators", ACM Transactions on
Mathematical Software 47 (2021) 36. The state is handed in, so a search is repeatable and no
generator is global. Multiplications are done in halves: without compilation numpy warns when a
64-bit scalar overflows.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from georoute.kernels._jit import Float, Int, kernel

__all__ = ["below", "new_stream", "next_u64", "uniform"]

_LOW = np.uint64(0xFFFFFFFF)
_HALF = np.uint64(32)
_UNIT = 1.0 / (1 << 53)


def new_stream(seed: int, index: int = 0) -> NDArray[np.uint64]:
    """Return the state (uint64, (4,)) of stream number ``index`` of ``seed``; both from 0 up.

    Streams of different index are independent (numpy's ``SeedSequence`` spawns them).
    """
    sequence = np.random.SeedSequence(seed, spawn_key=(index,))
    return sequence.generate_state(4, np.uint64).astype(np.uint64)


@kernel
def _times(x: np.uint64, factor: np.uint64) -> np.uint64:
    """Return ``x * factor`` modulo 2**64 for a factor below 2**32."""
    low = (x & _LOW) * factor
    high = (x >> _HALF) * factor + (low >> _HALF)
    return ((high & _LOW) << _HALF) | (low & _LOW)


@kernel
def _rotate_left(x: np.uint64, bits: np.uint64) -> np.uint64:
    return (x << bits) | (x >> (np.uint64(64) - bits))


@kernel
def next_u64(state: NDArray[np.uint64]) -> np.uint64:
    """Advance ``state`` and return 64 random bits."""
    result = _times(_rotate_left(_times(state[1], np.uint64(5)), np.uint64(7)), np.uint64(9))
    shifted = state[1] << np.uint64(17)
    state[2] ^= state[0]
    state[3] ^= state[1]
    state[1] ^= state[2]
    state[0] ^= state[3]
    state[2] ^= shifted
    state[3] = _rotate_left(state[3], np.uint64(45))
    return result


@kernel
def uniform(state: NDArray[np.uint64]) -> Float:
    """Return a number in [0, 1), a multiple of 2**-53."""
    return np.float64(next_u64(state) >> np.uint64(11)) * _UNIT


@kernel
def below(state: NDArray[np.uint64], n: Int) -> Int:
    """Return an integer in ``0 .. n - 1`` for 1 <= n < 2**32; its bias is below n / 2**32."""
    return np.int64(((next_u64(state) >> _HALF) * np.uint64(n)) >> _HALF)
