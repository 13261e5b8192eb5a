"""``georoute plan``: the main job."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from georoute.cli.clock import issue_time
from georoute.cli.render import print_caution, print_findings, print_json, stderr
from georoute.cli.running import progress_line, stop_on_interrupt
from georoute.cli.summary import as_json, capacity_line, print_plan
from georoute.domain.run import EFFORTS, Aim, EffortName

if TYPE_CHECKING:
    from georoute.domain.plan import Plan
    from georoute.domain.programme import Programme

__all__ = ["plan", "plan_and_write"]

COMPILING = "The first run compiles the search, which takes a minute or two; later runs do not."


def _with_search_settings(
    programme: Programme,
    *,
    aim: Aim | None,
    effort: EffortName | None,
    seconds: float | None,
    seed: int | None,
) -> Programme:
    """Return the programme with the settings of the command line in place of its own."""
    chosen = programme.effort if effort is None else EFFORTS[effort]
    limit = programme.effort.seconds if seconds is None else seconds
    return replace(
        programme,
        aim=programme.aim if aim is None else aim,
        effort=replace(chosen, seconds=limit),
        seed=programme.seed if seed is None else seed,
    )


def plan_and_write(programme: Programme, plan_file: Path, *, report: Path | None = None) -> Plan:
    """Read the register, plan it, and write the plan file; tell what matters on the way."""
    from georoute.pipeline import compile_search, compiled_before, make_plan, prepare
    from georoute.register import read_register, write_findings
    from georoute.store import write_plan

    register, findings = read_register(Path(programme.register.path), programme=programme)
    with progress_line(programme.tariff.currency) as progress:
        prepared = prepare(programme, register, progress=progress)
        findings = (*findings, *prepared.findings)
        if report is not None:
            write_findings(findings, report)
        print_findings(findings)
        stderr().print(capacity_line(prepared.capacity))
        if not compiled_before():
            stderr().print(COMPILING)
        compile_search(prepared, progress=progress)
        with stop_on_interrupt() as should_stop:
            finished = make_plan(
                prepared, progress=progress, should_stop=should_stop, issued=issue_time()
            )
            write_plan(finished, plan_file)
    return finished


def plan(
    programme: Annotated[Path, typer.Argument(help="The programme file (programme.toml).")],
    *,
    output: Annotated[
        Path | None,
        typer.Option("--output", "-o", help="The plan file; beside the programme by default."),
    ] = None,
    publish: Annotated[
        bool, typer.Option("--publish", help="Also write the pages of the plan.")
    ] = False,
    maps: Annotated[Path, typer.Option(help="Folder for the pages, in the current folder.")] = Path(
        "maps"
    ),
    aim: Annotated[
        Aim | None,
        typer.Option(help="What decides when the same visits are left out."),
    ] = None,
    effort: Annotated[
        EffortName | None, typer.Option(help="How hard to search; counted in steps.")
    ] = None,
    seconds: Annotated[
        float | None,
        typer.Option(
            min=0.0,
            metavar="SECONDS",
            help="Search for this long instead (the result may then vary).",
        ),
    ] = None,
    seed: Annotated[
        int | None, typer.Option(min=0, metavar="NUMBER", help="Seed of the search.")
    ] = None,
    report: Annotated[
        Path | None, typer.Option(help="Write warnings and notes to this .csv or .json file.")
    ] = None,
    json: Annotated[bool, typer.Option("--json", help="Print the plan as JSON.")] = False,
) -> None:
    """Plan a register.

    Which site on which day, by whom, in which order. Writes the plan file, and with --publish
    its pages. Ctrl-C ends the search with the best plan found so far. A plan that fails its own
    check is never written.
    """
    from georoute.register import read_programme

    settings = _with_search_settings(
        read_programme(programme),
        aim=aim,
        effort=effort,
        seconds=seconds,
        seed=seed,
    )
    plan_file = output if output is not None else programme.with_name("plan.gpkg")
    finished = plan_and_write(settings, plan_file, report=report)
    if json:
        print_json(as_json(finished))
    else:
        print_plan(finished, capacity=False)
    stderr().print(f"Plan file: {plan_file}")
    if publish:
        from georoute.publishing import publish as write_pages

        pages = write_pages(finished, maps)
        stderr().print(f"{len(pages)} pages in {maps}: open {maps / 'index.html'}")
    print_caution()
