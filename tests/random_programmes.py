"""Plan and audit many small random programmes, and set some beside brute force.

``python -m tests.random_programmes --count 10000 --brute 500 --seed 1`` draws programmes of up to
8 visits and 3 shifts, reads them from files, plans, audits, and writes and reads some of the plan
files. The first ``--brute`` of them are compared with the best plan over all days and orders.
"""

from __future__ import annotations

import argparse
import json
import multiprocessing
import sys
import tempfile
import time
from collections import Counter
from collections.abc import Sequence
from concurrent.futures import ProcessPoolExecutor
from concurrent.futures.process import BrokenProcessPool
from dataclasses import asdict
from functools import partial
from pathlib import Path

from georoute.domain.run import EFFORTS
from tests.random_programmes_judge import EQUAL, Verdict, judge

__all__ = ["main", "passes", "run", "summary"]

LEAST_EQUAL = 0.99
ROUND_TRIP_EVERY = 50
TELL_EVERY = 500


class _Apart:
    """Judges in a process of its own, so that a crash of the interpreter is a verdict too."""

    def __init__(self) -> None:
        self._pool = self._new()

    def _new(self) -> ProcessPoolExecutor:
        return ProcessPoolExecutor(1, mp_context=multiprocessing.get_context("spawn"))

    def judge(self, seed: int, folder: Path, effort: str, brute: bool, round_trip: bool) -> Verdict:
        work = partial(judge, seed, folder, effort=effort, brute=brute, round_trip=round_trip)
        try:
            return self._pool.submit(work).result()
        except BrokenProcessPool:
            self._pool = self._new()
            return Verdict(seed=seed, trouble="traceback", text="the interpreter crashed")

    def end(self) -> None:
        self._pool.shutdown()


def run(count: int, *, brute: int, seed: int, effort: str, folder: Path) -> list[Verdict]:
    """Judge the programmes of the seeds from ``seed`` on; trouble is printed as it comes."""
    verdicts = []
    begin = time.monotonic()
    apart = _Apart()
    for k in range(count):
        verdict = apart.judge(seed + k, folder, effort, k < brute, k % ROUND_TRIP_EVERY == 0)
        verdicts.append(verdict)
        if verdict.trouble or verdict.beside_brute not in {"", EQUAL}:
            kind = verdict.trouble or verdict.beside_brute
            print(f"seed {verdict.seed}: {kind}: {verdict.text}", flush=True)
        if (k + 1) % TELL_EVERY == 0:
            print(f"{k + 1} done, {time.monotonic() - begin:.0f} s", file=sys.stderr, flush=True)
    apart.end()
    return verdicts


def _seeds(verdicts: Sequence[Verdict], kind: str) -> str:
    found = [str(v.seed) for v in verdicts if kind in {v.trouble, v.beside_brute}]
    return f"{len(found)} {kind}" + (f" (seeds {', '.join(found)})" if found else "")


def summary(verdicts: Sequence[Verdict]) -> str:
    """Return the counts in one line."""
    beside = Counter(v.beside_brute for v in verdicts if v.beside_brute)
    compared = sum(beside.values())
    text = (
        f"{len(verdicts)} programmes, {sum(v.placed for v in verdicts)} of "
        f"{sum(v.visits for v in verdicts)} visits placed: "
        f"{_seeds(verdicts, 'violation')}, {_seeds(verdicts, 'traceback')}, "
        f"{_seeds(verdicts, 'warning')}"
    )
    if compared:
        text += (
            f"; {compared} beside brute force: {beside[EQUAL]} equal "
            f"({beside[EQUAL] / compared:.1%}), {_seeds(verdicts, 'worse')}, "
            f"{_seeds(verdicts, 'better')}"
        )
    return text


def passes(verdicts: Sequence[Verdict], *, brute: int) -> bool:
    """Tell whether nothing broke, nothing beat brute force, and enough is equal to it."""
    if any(v.trouble or v.beside_brute == "better" for v in verdicts):
        return False
    equal = sum(v.beside_brute == EQUAL for v in verdicts)
    return equal >= LEAST_EQUAL * min(brute, len(verdicts))


def _options(arguments: Sequence[str] | None) -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.random_programmes", description=__doc__)
    parser.add_argument("--count", type=int, default=10_000, help="programmes to plan")
    parser.add_argument("--brute", type=int, default=0, help="how many of them by brute force too")
    parser.add_argument("--seed", type=int, default=1, help="the first seed")
    parser.add_argument("--first", type=int, metavar="SEED", help="only this seed, and keep it")
    parser.add_argument("--effort", choices=list(EFFORTS), default="quick")
    parser.add_argument("--folder", type=Path, help="where files are written (default: temporary)")
    parser.add_argument("--json", type=Path, help="write all verdicts here")
    return parser.parse_args(arguments)


def main(arguments: Sequence[str] | None = None) -> int:
    """Judge as many programmes as asked for; return 1 where something is wrong."""
    options = _options(arguments)
    seed, count, brute = options.seed, options.count, options.brute
    if options.first is not None:
        seed, count, brute = options.first, 1, 1
    with tempfile.TemporaryDirectory() as scratch:
        folder = options.folder or Path(scratch)
        verdicts = run(count, brute=brute, seed=seed, effort=options.effort, folder=folder)
    if options.json is not None:
        options.json.write_text(json.dumps([asdict(v) for v in verdicts], indent=1))
    print(summary(verdicts))
    return 0 if passes(verdicts, brute=brute) else 1


if __name__ == "__main__":
    sys.exit(main())
