"""Run the engine on a published set and compare with the best values known.

Seconds are CPU seconds of all threads, after compilation. Best-known values are read when all
runs of an instance are done. Costs and violations are judged by code apart from the engine.
"""

from __future__ import annotations

import argparse
import csv
import json
import os
import statistics
from collections.abc import Callable, Sequence
from dataclasses import asdict, dataclass
from fnmatch import fnmatch
from pathlib import Path

from tests.benchmarks import tsplib
from tests.benchmarks.engine import compile_once, solve
from tests.benchmarks.instance import Instance, Tour

__all__ = ["READERS", "Record", "Row", "chosen_instances", "main", "spread"]

READERS: dict[str, tuple[str, Callable[[Path], Instance]]] = {
    "tsplib95-tsp": ("*.tsp", tsplib.read),
    "tsplib95-atsp": ("*.atsp", tsplib.read),
}
"""For each set the pattern of its instance files and their reader."""

CORE = 6


@dataclass(frozen=True, kw_only=True)
class Record:
    """One run: what is kept in the file of ``--json``."""

    set: str
    instance: str
    size: int
    seed: int
    seconds: float
    value: float
    cpu_s: float
    iterations: int
    violations: tuple[str, ...]
    tours: tuple[str, ...]


@dataclass(frozen=True, kw_only=True)
class Row:
    """All runs of one instance against the best value known."""

    instance: str
    size: int
    best_known: float
    median: float
    best: float
    cpu_s: float
    iterations: float
    violations: int

    @property
    def gap(self) -> float:
        """Per cent by which the median lies above the best value known."""
        return 100.0 * (self.median / self.best_known - 1.0)

    def text(self) -> str:
        """Return the row as it is printed."""
        best_gap = 100.0 * (self.best / self.best_known - 1.0)
        return (
            f"{self.instance:<12} n {self.size:>6}  best known {self.best_known:>12.10g}  "
            f"median {self.median:>12.10g}  best {self.best:>12.10g}  gap {self.gap:7.3f} %  "
            f"(best {best_gap:.3f} %)  {self.cpu_s:6.2f} CPU s  {self.iterations:9.0f} kicks  "
            f"violations {self.violations}"
        )


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
    archive = _Archive(options.json)
    rows = [_run_instance(instance, folder, options, archive) for instance in instances]
    gaps = [row.gap for row in rows]
    violations = sum(row.violations for row in rows)
    print(
        f"{options.set}: {len(rows)} instances, mean gap {statistics.mean(gaps):.3f} %, "
        f"worst {max(gaps):.3f} %, violations {violations}"
    )
    return 1 if violations else 0


def _options(arguments: Sequence[str] | None) -> argparse.Namespace:
    parser = argparse.ArgumentParser(prog="python -m tests.benchmarks", description=__doc__)
    parser.add_argument("set", choices=sorted(READERS), metavar="SET", help=", ".join(READERS))
    parser.add_argument("--data", help="folder of the sets (default: GEOROUTE_BENCHMARKS)")
    parser.add_argument("--instances", default="*", metavar="GLOB", help="names to run")
    parser.add_argument("--max-n", type=int, metavar="N", help="only instances up to this size")
    parser.add_argument("--core", action="store_true", help=f"up to {CORE} of them, spread out")
    parser.add_argument("--seconds", type=float, default=5.0, help="CPU seconds a run")
    parser.add_argument("--seeds", type=int, default=1, help="runs of each instance")
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


def _run_instance(
    instance: Instance, folder: Path, options: argparse.Namespace, archive: _Archive
) -> Row:
    records = []
    for seed in range(options.seeds):
        record = archive.find(options.set, instance.name, seed, options.seconds)
        if record is None:
            record = _run(instance, options.set, seed=seed, seconds=options.seconds)
            archive.add(record)
        records.append(record)
    best = min(records, key=lambda record: record.value)
    if options.solutions is not None:
        options.solutions.mkdir(parents=True, exist_ok=True)
        path = options.solutions / f"{instance.name}.sol"
        path.write_text("".join(f"{line}\n" for line in best.tours))
    row = Row(
        instance=instance.name,
        size=instance.size,
        best_known=_best_known(folder, instance.name),
        median=statistics.median(record.value for record in records),
        best=best.value,
        cpu_s=statistics.median(record.cpu_s for record in records),
        iterations=statistics.median(record.iterations for record in records),
        violations=sum(len(record.violations) for record in records),
    )
    print(row.text(), flush=True)
    return row


def _run(instance: Instance, name: str, *, seed: int, seconds: float) -> Record:
    run = solve(instance.problem(), seconds=seconds, seed=seed)
    tours: tuple[Tour, ...] = instance.tours(run.solution)
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


def _best_known(folder: Path, name: str) -> float:
    with (folder / "best_known.csv").open(newline="") as file:
        for row in csv.DictReader(file):
            if row["instance"] == name:
                return float(row["best_known"])
    msg = f"best_known.csv has no row for {name!r}"
    raise KeyError(msg)


class _Archive:
    """All runs so far, in a file if one is named."""

    def __init__(self, path: Path | None) -> None:
        self._path = path
        self._records: list[Record] = []
        if path is not None and path.exists():
            for item in json.loads(path.read_text()):
                lists = {key: tuple(item[key]) for key in ("violations", "tours")}
                self._records.append(Record(**{**item, **lists}))

    def find(self, name: str, instance: str, seed: int, seconds: float) -> Record | None:
        """Return the run already made, if there is one."""
        wanted = (name, instance, seed, seconds)
        for record in self._records:
            if (record.set, record.instance, record.seed, record.seconds) == wanted:
                return record
        return None

    def add(self, record: Record) -> None:
        """Keep a run; the file is replaced whole, so that a kill leaves the one before."""
        self._records.append(record)
        if self._path is not None:
            new = self._path.with_suffix(self._path.suffix + ".new")
            new.write_text(json.dumps([asdict(item) for item in self._records], indent=1))
            new.replace(self._path)
