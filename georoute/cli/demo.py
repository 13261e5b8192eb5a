"""``georoute demo``: write, plan and publish an invented programme."""

from __future__ import annotations

from importlib.resources import as_file, files
from pathlib import Path
from typing import TYPE_CHECKING, Annotated

import typer

from georoute.cli.plan import plan_and_write
from georoute.cli.render import print_caution, stderr
from georoute.cli.summary import print_plan
from georoute.errors import OutputError

if TYPE_CHECKING:
    from importlib.resources.abc import Traversable

__all__ = ["demo"]


def _demo_files() -> Traversable:
    """Return the folder of the demo: inside an installed package, or beside a source tree."""
    installed = files("georoute") / "_data" / "demo"
    if installed.is_dir():
        return installed
    return files("georoute").joinpath("..", "data", "demo")


def _write_inputs(folder: Path) -> None:
    """Copy the invented register and programme to ``folder``; files already there are kept."""
    from georoute.files import atomic_write_bytes

    with as_file(_demo_files()) as source:
        for item in sorted(source.iterdir()):
            target = folder / item.name
            if item.is_file() and not target.exists():
                atomic_write_bytes(target, item.read_bytes())


def demo(
    folder: Annotated[Path, typer.Argument(help="Folder for the demo.")] = Path("georoute-demo"),
) -> None:
    """Write, plan and publish the demo.

    The demo is an invented inspection office with its register and programme.

    Files of the demo that are in the folder already are kept, so that you can change them and
    run it again.
    """
    from georoute.publishing import publish
    from georoute.register import read_programme

    if folder.exists() and not folder.is_dir():
        msg = f"{folder} is a file; name a folder for the demo."
        raise OutputError(msg)
    _write_inputs(folder)
    finished = plan_and_write(read_programme(folder / "programme.toml"), folder / "plan.gpkg")
    print_plan(finished, capacity=False)
    pages = publish(finished, folder / "maps")
    stderr().print(f"{len(pages)} pages: open {folder / 'maps' / 'index.html'}")
    print_caution()
