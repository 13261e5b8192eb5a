"""The program: its commands, and how errors become exit codes."""

from __future__ import annotations

import sys
from typing import Annotated

import typer

from georoute import __version__
from georoute.cli.check import check
from georoute.cli.demo import demo
from georoute.cli.exit_codes import ExitCode
from georoute.cli.plan import plan
from georoute.cli.publish import publish
from georoute.cli.render import print_error, print_findings
from georoute.cli.roads import roads
from georoute.cli.show import show
from georoute.errors import GeorouteError, InputError, OutputError, PlanError

__all__ = ["app", "exit_code_of", "main"]

app = typer.Typer(
    name="georoute",
    help=(
        "Turn a register of sites into days of work: who visits which site on which day, in "
        "which order, at the least cost."
    ),
    no_args_is_help=True,
    add_completion=False,
    pretty_exceptions_enable=False,
    rich_markup_mode=None,
    context_settings={"help_option_names": ["-h", "--help"]},
)
for command in (check, roads, plan, show, publish, demo):
    app.command()(command)


def _print_version(wanted: bool) -> None:
    if wanted:
        typer.echo(f"georoute {__version__}")
        raise typer.Exit


@app.callback()
def _options(
    *,
    version: Annotated[
        bool,
        typer.Option(
            "--version", callback=_print_version, is_eager=True, help="Print the version and end."
        ),
    ] = False,
) -> None:
    """Hold the options that go before the command."""


def exit_code_of(error: GeorouteError) -> ExitCode:
    """Return the exit code that tells what kind of error ended a command."""
    if isinstance(error, InputError):
        return ExitCode.INPUT_FAULTS
    if isinstance(error, PlanError):
        return ExitCode.PLAN_FAULTS
    if isinstance(error, OutputError):
        return ExitCode.NOT_WRITTEN
    return ExitCode.DEFECT


def main() -> None:
    """Run the program; every error it knows ends in a message and a documented exit code."""
    try:
        app()
    except GeorouteError as error:
        print_findings(error.findings)
        print_error(str(error))
        sys.exit(exit_code_of(error))
    except KeyboardInterrupt:
        print_error("Interrupted; nothing was written.")
        sys.exit(ExitCode.INTERRUPTED)
