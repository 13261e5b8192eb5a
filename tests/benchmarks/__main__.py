"""``python -m tests.benchmarks SET …``, or ``speed …`` or ``interrupt …`` in place of a set."""

from __future__ import annotations

import sys

from tests.benchmarks import interrupt, runner, speed

OTHERS = {"speed": speed.main, "interrupt": interrupt.main}

if __name__ == "__main__":
    name, *rest = sys.argv[1:] or [""]
    sys.exit(OTHERS[name](rest) if name in OTHERS else runner.main(sys.argv[1:]))
