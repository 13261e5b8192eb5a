"""Run the engine on a published set and compare with the best values known.

Seconds are CPU seconds of all threads, after compilation. Best-known values are read when all
runs of an instance are done. Costs and violations are judged by code apart from the engine.
"""

from __future__ import annotations

import argparse
import csv
import math
import os
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fnmatch import fnmatch
from pathlib import Path

from tests.benchmarks import capacitated, reference, tsplib
from tests.benchmarks.engine import compile_once, solve
from tests.benchmarks.instance import Instance
from tests.benchmarks.records import OWN, Archive, Record, Row, closing

__all__ = ["READERS", "chosen_instances", "main", "spread"]

READERS: dict[str, tuple[str, Callable[[Path], Instance]]] = {
    "tsplib95-tsp": ("*.tsp", tsplib.read),
    "tsplib95-atsp": ("*.atsp", tsplib.read),
    "cmt-cvrp": ("*.vrp", capacitated.read_exact),
    "golden-cvrp": ("*.vrp", capacitated.read_exact),
    "uchoa-x-cvrp": ("*.vrp", capacitated.read_rounded),
}
"""For each set the pattern of its instance files and their reader."""

CORE = 6


def main(arguments: Sequence[str] | None = None) -> int:
    """Run a set; return 1 if any solution breaks a rule."""
    options = _options(arguments)
    data = options.data or os.environ.get("GEOROUTE_BENCHMARKS", "")
    if not data or not (folder := Path(data) / options.set).is_dir():
        print(f"no folder {options.set!r} in --data or GEOROUTE_BENCHMARKS ({data!r})")
        return 2
    instances = chosen_instances(
        folder, options.set, pattern=options.instances, most=options.max_n, core=options.core
    )
    if not instances:
        print(f"{options.set}: no instance matches")
        return 2
    compile_once(instances[0].problem())
    work = _Work(folder=folder, options=options, archive=Archive(options.json))
    rows = [work.rows_of(instance) for instance in instances]
    own, others = [pair[0] for pair in rows], [pair[1] for pair in rows if pair[1] is not None]
    beside = f"; {reference.NAME} in the same seconds: {closing(others)}" if others else ""
    print(f"{options.set}: {closing(own)}{beside}")
    return 1 if any(row.violations for row in own) else 0


def _options(arguments: Sequence[str] | None) -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks", description=__doc__)
    parser.add_argument("set", choices=sorted(READERS), metavar="SET", help=", ".join(READERS))
    parser.add_argument("--data", help="folder of the sets (default: GEOROUTE_BENCHMARKS)")
    parser.add_argument("--instances", default="*", metavar="GLOB", help="names to run")
    parser.add_argument("--max-n", type=int, metavar="N", help="only instances up to this size")
    parser.add_argument("--core", action="store_true", help=f"up to {CORE} of them, spread out")
    parser.add_argument("--seconds", type=float, default=5.0, help="CPU seconds a run")
    parser.add_argument("--seeds", type=int, default=1, help="runs of each instance")
    parser.add_argument(
        "--reference", action="store_true", help=f"also run {reference.NAME}, once an instance"
    )
    parser.add_argument("--solutions", type=Path, help="folder for the best solutions")
    parser.add_argument("--json", type=Path, help="keep all runs here; go on where it ends")
    return parser.parse_args(arguments)


def chosen_instances(
    folder: Path, name: str, *, pattern: str = "*", most: int | None = None, core: bool = False
) -> list[Instance]:
    """Return the instances of a set that match, by name."""
    files, reader = READERS[name]
    found = [
        reader(path)
        for path in sorted((folder / "instances").glob(files))
        if fnmatch(path.stem, pattern)
    ]
    kept = [instance for instance in found if most is None or instance.size <= most]
    return spread(kept, CORE) if core else kept


def spread(items: list[Instance], count: int) -> list[Instance]:
    """Return up to ``count`` of ``items``, the first, the last and evenly between."""
    if len(items) <= count:
        return items
    return [items[round(k * (len(items) - 1) / (count - 1))] for k in range(count)]


@dataclass(frozen=True, kw_only=True)
class _Work:
    """The runs asked for, those already made, and where best-known values are."""

    folder: Path
    options: argparse.Namespace
    archive: Archive

    def rows_of(self, instance: Instance) -> tuple[Row, Row | None]:
        """Run an instance, print its row, and return the rows of engine and reference."""
        records = [self._record(instance, OWN, seed) for seed in range(self.options.seeds)]
        if self.options.solutions is not None:
            _write_solution(self.options.solutions, records)
        rivals = [self._record(instance, reference.NAME, 0)] if self.options.reference else []
        best_known = _best_known(self.folder, instance.name)
        row = Row.of(records, best_known)
        other = Row.of(rivals, best_known) if rivals else None
        print(row.text() + (other.text_beside() if other else ""), flush=True)
        return row, other

    def _record(self, instance: Instance, solver: str, seed: int) -> Record:
        seconds = self.options.seconds
        key = (self.options.set, instance.name, solver, seed, seconds)
        record = self.archive.find(key)
        if record is None:
            run = _run_own if solver == OWN else _run_reference
            record = run(instance, self.options.set, seed, seconds)
            self.archive.add(record)
        return record


def _write_solution(folder: Path, records: Sequence[Record]) -> None:
    best = min(records, key=lambda record: (len(record.violations), record.value))
    folder.mkdir(parents=True, exist_ok=True)
    (folder / f"{best.instance}.sol").write_text("".join(f"{line}\n" for line in best.tours))


def _run_own(instance: Instance, name: str, seed: int, seconds: float) -> Record:
    run = solve(instance.problem(), seconds=seconds, seed=seed)
    tours = instance.tours(run.solution)
    return Record(
        set=name,
        instance=instance.name,
        size=instance.size,
        seed=seed,
        seconds=seconds,
        value=instance.cost(tours),
        cpu_s=run.cpu_s,
        iterations=run.iterations,
        violations=instance.violations(tours),
        tours=tuple(tour.line() for tour in tours),
    )


def _run_reference(instance: Instance, name: str, seed: int, seconds: float) -> Record:
    run = reference.solve(instance.problem(), seconds=seconds)
    tours = () if run.solution is None else instance.tours(run.solution)
    return Record(
        set=name,
        instance=instance.name,
        size=instance.size,
        seed=seed,
        seconds=seconds,
        value=instance.cost(tours) if tours else math.inf,
        cpu_s=run.cpu_s,
        iterations=0,
        violations=instance.violations(tours) if tours else (),
        tours=tuple(tour.line() for tour in tours),
        solver=reference.NAME,
    )


def _best_known(folder: Path, name: str) -> float:
    with (folder / "best_known.csv").open(newline="") as file:
        for row in csv.DictReader(file):
            if row["instance"] == name:
                return float(row["best_known"])
    msg = f"best_known.csv has no row for {name!r}"
    raise KeyError(msg)
