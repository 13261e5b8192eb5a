"""The random stream against its published algorithm."""

from __future__ import annotations

import numpy as np
import pytest

from georoute.kernels.random_stream import below, new_stream, next_u64, uniform

_MASK = (1 << 64) - 1


def _rotl(x: int, k: int) -> int:
    return ((x << k) | (x >> (64 - k))) & _MASK


def _plain_next(s: list[int]) -> int:
    """xoshiro256** of Blackman and Vigna (2021), retyped with Python's unbounded integers."""
    result = (_rotl((s[1] * 5) & _MASK, 7) * 9) & _MASK
    t = (s[1] << 17) & _MASK
    s[2] ^= s[0]
    s[3] ^= s[1]
    s[1] ^= s[2]
    s[0] ^= s[3]
    s[2] ^= t
    s[3] = _rotl(s[3], 45)
    return result


def test_first_outputs_from_state_1_2_3_4() -> None:
    # Values of the authors' C code from this state, as quoted in ports of it (from memory).
    state = np.array([1, 2, 3, 4], np.uint64)
    assert [int(next_u64(state)) for _ in range(4)] == [11520, 0, 1509978240, 1215971899390074240]


@pytest.mark.parametrize("seed", [0, 1, 2**63 - 1])
def test_equals_the_algorithm_in_unbounded_integers(seed: int) -> None:
    state = new_stream(seed, 3)
    plain = [int(word) for word in state]
    for _ in range(200):
        assert int(next_u64(state)) == _plain_next(plain)
    assert [int(word) for word in state] == plain


def test_same_seed_same_stream_other_index_other_stream() -> None:
    assert np.array_equal(new_stream(7, 2), new_stream(7, 2))
    assert not np.array_equal(new_stream(7, 2), new_stream(7, 3))
    assert not np.array_equal(new_stream(7, 2), new_stream(8, 2))


def test_below_is_even_and_within_range() -> None:
    state = new_stream(11)
    draws = 14_000
    counts = np.bincount([int(below(state, 7)) for _ in range(draws)], minlength=7)
    assert counts.shape == (7,)
    # Chi-square with 6 degrees of freedom: 22.46 is the 0.999 quantile (common table).
    expected = draws / 7
    assert float(((counts - expected) ** 2 / expected).sum()) < 22.46


def test_uniform_lies_in_the_unit_interval() -> None:
    state = new_stream(5)
    draws = np.array([float(uniform(state)) for _ in range(5_000)])
    assert draws.min() >= 0.0
    assert draws.max() < 1.0
    assert abs(draws.mean() - 0.5) < 4 * np.sqrt(1 / 12 / draws.size)
