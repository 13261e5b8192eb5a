"""``georoute roads``: read a source of roads, build its network, and say what is in it."""

from __future__ import annotations

from dataclasses import asdict
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from georoute.cli.render import counted, new_table, print_json, stderr, stdout
from georoute.cli.running import progress_line

if TYPE_CHECKING:
    from georoute.roads.describe import Description

__all__ = ["roads"]


def _print(found: Description) -> None:
    console = stdout()
    figures = ("km", "one way km", "stretches", "mean km/h")
    table = new_table("class", *figures, right=figures)
    for row in found.classes:
        table.add_row(
            row.road_class,
            f"{row.km:,.1f}",
            f"{row.one_way_km:,.1f}",
            f"{row.stretches:,}",
            f"{row.mean_kmh:.0f}",
        )
    console.print(f"Roads of {found.source}")
    console.print(table)
    console.print(
        f"{found.km:,.1f} km in {found.stretches:,} stretches between {found.junctions:,} "
        f"junctions; {counted(found.banned_turns, 'banned turn')}."
    )
    for why, km in found.cut_off_km:
        console.print(f"Cut off from the main part: {km:,.1f} km ({why}).")
    for remark in found.remarks:
        example = f", for instance {remark.example}" if remark.example else ""
        console.print(f"Noticed: {remark.count:,} {remark.text}{example}", markup=False)
    if found.credit:
        console.print(f"Data: {found.credit}", markup=False)


def roads(
    source: Annotated[Path, typer.Argument(help="Extract, saved network or table of edges.")],
    *,
    country: Annotated[
        str, typer.Option(help="Country whose speeds hold where the map has no limit (CL).")
    ] = "",
    json: Annotated[bool, typer.Option("--json", help="Print the description as JSON.")] = False,
) -> None:
    """Build and describe a road network.

    Kilometres and speeds by class, what does not hang together, turn restrictions read and left
    out, and what the reader could not make sense of. Nothing is planned.
    """
    from georoute.roads.cache import cached_roads, settings_key
    from georoute.roads.describe import describe
    from georoute.roads.sources import read_road_source
    from georoute.roads.speeds import default_profile

    profile = default_profile(country)
    with progress_line("") as progress:
        built = cached_roads(
            source,
            lambda: read_road_source(source, profile=profile, progress=progress),
            settings=settings_key(profile, None, {}),
            progress=progress,
        )
    found = describe(built.network)
    if json:
        print_json(asdict(found))
    else:
        _print(found)
    if built.kept:
        stderr().print("The network was kept from an earlier run.")
