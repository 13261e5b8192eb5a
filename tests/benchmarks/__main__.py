"""``python -m tests.benchmarks SET …``, or ``speed …`` or ``interrupt …`` in place of a set."""

from __future__ import annotations

import sys
from collections.abc import Sequence

from tests.benchmarks import interrupt, roads_reading, roads_speed, runner, speed


def _speed(arguments: Sequence[str]) -> int:
    """Print every ratio of speed: distances, reading of extracts, searches on roads."""
    code = speed.main(arguments)
    roads_reading.pbf_against_osmnx()
    return code or roads_speed.main(["--small"] if "--small" in arguments else [])


OTHERS = {"speed": _speed, "interrupt": interrupt.main}

if __name__ == "__main__":
    name, *rest = sys.argv[1:] or [""]
    sys.exit(OTHERS[name](rest) if name in OTHERS else runner.main(sys.argv[1:]))
