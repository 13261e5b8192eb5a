"""Compiled loops: arrays and scalars only; the one place that knows numba."""
