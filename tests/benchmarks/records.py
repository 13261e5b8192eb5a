"""What is kept and printed of the runs of a set."""

from __future__ import annotations

import json
import math
import statistics
from collections.abc import Sequence
from dataclasses import asdict, dataclass
from pathlib import Path

__all__ = ["OWN", "Archive", "Record", "Row", "closing"]

OWN = "georoute"


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
    solver: str = OWN


@dataclass(frozen=True, kw_only=True)
class Row:
    """All runs of one instance by one solver against the best value known."""

    instance: str
    size: int
    best_known: float
    median: float
    best: float
    cpu_s: float
    iterations: float
    violations: int
    solver: str

    @classmethod
    def of(cls, records: Sequence[Record], best_known: float) -> Row:
        """Return what the runs of one instance come to."""
        return cls(
            instance=records[0].instance,
            size=records[0].size,
            best_known=best_known,
            median=statistics.median(record.value for record in records),
            best=min(record.value for record in records),
            cpu_s=statistics.median(record.cpu_s for record in records),
            iterations=statistics.median(record.iterations for record in records),
            violations=sum(len(record.violations) for record in records),
            solver=records[0].solver,
        )

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
            f"(best {best_gap:.3f} %)  {self.cpu_s:6.2f} CPU s  "
            f"{self.iterations:9.0f} iterations  violations {self.violations}"
        )

    def text_beside(self) -> str:
        """Return what is printed of a reference in the row of the engine."""
        found = "no solution"
        if math.isfinite(self.median):
            found = f"{self.median:.10g}  gap {self.gap:7.3f} %"
        return f"  | {self.solver} {found}  {self.cpu_s:6.2f} CPU s  violations {self.violations}"


def closing(rows: Sequence[Row]) -> str:
    """Return mean and worst gap and all violations of rows of one solver."""
    gaps = [row.gap for row in rows if math.isfinite(row.gap)]
    missing = len(rows) - len(gaps)
    return (
        f"{len(rows)} instances, mean gap {statistics.mean(gaps or [math.inf]):.3f} %, "
        f"worst {max(gaps, default=math.inf):.3f} %, "
        f"violations {sum(row.violations for row in rows)}"
        + (f", {missing} without a solution" if missing else "")
    )


class Archive:
    """All runs so far, in a file if one is named."""

    def __init__(self, path: Path | None) -> None:
        self._path = path
        self._records: list[Record] = []
        if path is not None and path.exists():
            for item in json.loads(path.read_text()):
                lists = {key: tuple(item[key]) for key in ("violations", "tours")}
                self._records.append(Record(**{**item, **lists}))

    def find(self, wanted: tuple[str, str, str, int, float]) -> Record | None:
        """Return the run of this set, instance, solver, seed and seconds, if it was made."""
        for record in self._records:
            key = (record.set, record.instance, record.solver, record.seed, record.seconds)
            if key == wanted:
                return record
        return None

    def add(self, record: Record) -> None:
        """Keep a run; the file is replaced whole, so that a kill leaves the one before."""
        self._records.append(record)
        if self._path is not None:
            new = self._path.with_suffix(self._path.suffix + ".new")
            new.write_text(json.dumps([asdict(item) for item in self._records], indent=1))
            new.replace(self._path)
