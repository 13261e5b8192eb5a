"""Compiled loops: arrays and scalars only; the one place that knows numba."""

from georoute.kernels._jit import compiled_before

__all__ = ["compiled_before"]
