"""``python -m tests.benchmarks SET …`` or ``python -m tests.benchmarks speed …``."""

from __future__ import annotations

import sys

from tests.benchmarks import runner, speed

if __name__ == "__main__":
    arguments = sys.argv[1:]
    if arguments[:1] == ["speed"]:
        sys.exit(speed.main(arguments[1:]))
    sys.exit(runner.main(arguments))
