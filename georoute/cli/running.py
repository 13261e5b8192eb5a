"""Long work at the terminal: a progress line, and Ctrl-C that ends with the best plan so far."""

from __future__ import annotations

import signal
from contextlib import contextmanager
from typing import TYPE_CHECKING

from rich.progress import BarColumn, Progress, SpinnerColumn, TextColumn, TimeElapsedColumn

from georoute.cli.render import stderr

if TYPE_CHECKING:
    from collections.abc import Iterator
    from types import FrameType

    from rich.progress import TaskID

__all__ = ["ProgressLine", "StopOnInterrupt", "progress_line", "stop_on_interrupt"]

STAGES = {
    "compile": "compiling once",
    "measure": "measuring travel",
    "split": "sites to days",
    "order": "order within days",
    "days": "days together",
    "check": "checking the plan",
}


class ProgressLine:
    """Shows the stage at hand, how far it is, the cost now and the best so far."""

    def __init__(self, bar: Progress, currency: str) -> None:
        self._bar = bar
        self._currency = currency
        self._task: TaskID = bar.add_task("", total=1.0, told="")
        self._best: float | None = None

    def __call__(
        self,
        stage: str,
        *,
        fraction: float,
        cost: float | None = None,
        best_cost: float | None = None,
    ) -> None:
        """Take one report of progress."""
        best = cost if best_cost is None else best_cost
        if best is not None:
            self._best = best
        told = "" if cost is None else f"cost {cost:,.0f} {self._currency}"
        if self._best is not None:
            told += f"  best {self._best:,.0f}"
        self._bar.update(
            self._task, description=STAGES.get(stage, stage), completed=fraction, told=told
        )


@contextmanager
def progress_line(currency: str) -> Iterator[ProgressLine]:
    """Show a progress line on standard error while the block runs (nothing when redirected)."""
    console = stderr()
    columns = (
        SpinnerColumn(),
        TextColumn("{task.description:<18}"),
        BarColumn(bar_width=24),
        TextColumn("{task.fields[told]}"),
        TimeElapsedColumn(),
    )
    with Progress(
        *columns, console=console, transient=True, disable=not console.is_terminal
    ) as bar:
        yield ProgressLine(bar, currency)


class StopOnInterrupt:
    """True once Ctrl-C was pressed; a second Ctrl-C ends the program at once."""

    def __init__(self) -> None:
        self._pressed = False

    def __call__(self) -> bool:
        """Tell whether Ctrl-C was pressed."""
        return self._pressed

    def press(self, _signal: int, _frame: FrameType | None) -> None:
        """Take the first Ctrl-C as a wish to end; the second raises ``KeyboardInterrupt``."""
        if self._pressed:
            raise KeyboardInterrupt
        self._pressed = True


@contextmanager
def stop_on_interrupt() -> Iterator[StopOnInterrupt]:
    """Turn Ctrl-C (SIGINT) and SIGTERM into a wish to end while the block runs."""
    stop = StopOnInterrupt()
    signals = (signal.SIGINT, signal.SIGTERM)
    before = {number: signal.signal(number, stop.press) for number in signals}
    try:
        yield stop
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
