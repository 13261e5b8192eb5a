"""What every test shares: the profiles of the property tests, and the sets that may be absent."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from hypothesis import settings

# Compile time breaks deadlines; a failing example is printed so that it can be run again.
settings.register_profile("default", deadline=None, print_blob=True)
settings.register_profile("ci", parent=settings.get_profile("default"), derandomize=True)
settings.register_profile("nightly", parent=settings.get_profile("default"), max_examples=2_000)
# For kernels that run as plain Python, a hundred times slower.
settings.register_profile("few", parent=settings.get_profile("ci"), max_examples=8)
settings.load_profile(os.environ.get("HYPOTHESIS_PROFILE", "ci"))


def absent(what: str, message: str) -> None:
    """Skip, or fail where GEOROUTE_REQUIRE says that ``what`` has to be there."""
    if what in os.environ.get("GEOROUTE_REQUIRE", "").split(","):
        pytest.fail(f"{message} (GEOROUTE_REQUIRE asks for {what})")
    pytest.skip(message)


@pytest.fixture(scope="session")
def benchmark_sets() -> Path:
    """The folder of the published benchmark sets."""
    folder = os.environ.get("GEOROUTE_BENCHMARKS", "")
    if not folder or not Path(folder).is_dir():
        absent("benchmarks", "GEOROUTE_BENCHMARKS names no folder of benchmark sets")
    return Path(folder)
