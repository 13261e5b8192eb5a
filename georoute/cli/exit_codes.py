"""What the program tells the shell when it ends. README lists the same table."""

from __future__ import annotations

from enum import IntEnum

__all__ = ["MEANINGS", "ExitCode"]


class ExitCode(IntEnum):
    """Exit codes of every command."""

    DONE = 0
    DEFECT = 1
    USAGE = 2
    INPUT_FAULTS = 3
    PLAN_FAULTS = 4
    NOT_WRITTEN = 5
    INTERRUPTED = 130


MEANINGS: dict[ExitCode, str] = {
    ExitCode.DONE: "done (warnings and unplaced visits are told, and do not change the code)",
    ExitCode.DEFECT: "a defect of the program: please report the message",
    ExitCode.USAGE: "the command was not understood",
    ExitCode.INPUT_FAULTS: "register, programme or travel table have faults; nothing was planned",
    ExitCode.PLAN_FAULTS: "the plan file cannot be read, or the plan failed its check",
    ExitCode.NOT_WRITTEN: "a result could not be written; the earlier file is untouched",
    ExitCode.INTERRUPTED: "interrupted before there was any plan to keep",
}
