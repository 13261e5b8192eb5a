"""The sample pages of the demo in ``maps/demo``: ``python -m tests.sample_pages`` renews them.

The demo is planned through the public interface with a fixed time of issue, so that the same
program makes the same bytes, and the pictures for README are taken by the browser of the tests.
"""

from __future__ import annotations

import argparse
import shutil
import sys
from collections.abc import Sequence
from datetime import UTC, date, datetime
from pathlib import Path

from playwright.sync_api import Browser, sync_playwright

import georoute
from georoute.publishing.names import page_name
from tests.browser.conftest import FLAGS

ROOT = Path(__file__).resolve().parents[1]
DEMO = ROOT / "data" / "demo"
SAMPLE = ROOT / "maps" / "demo"
ISSUED = datetime(2027, 2, 26, 18, 30, tzinfo=UTC)
"""The Friday before the demo's week."""
SHOWN = page_name("day", date(2027, 3, 2), "benito")
"""The day page of which a picture is taken."""
WIDTH, HEIGHT = 1280, 760
PICTURES = {"overview.png": "index.html", "day.png": SHOWN, "office.png": "office.html"}
MOST_PICTURE_BYTES = 250_000


def publish_demo(folder: Path) -> tuple[Path, ...]:
    """Plan the demo and publish its pages into a folder."""
    programme = georoute.read_programme(DEMO / "programme.toml")
    register, _ = georoute.read_register(Path(programme.register.path), programme=programme)
    plan = georoute.plan(programme, register, issued=ISSUED)
    return georoute.publish(plan, folder)


def take_picture(browser: Browser, page_path: Path, target: Path) -> None:
    """Write a picture of a page as it opens on a desk, on the day before the demo's week."""
    context = browser.new_context(viewport={"width": WIDTH, "height": HEIGHT})
    page = context.new_page()
    page.clock.set_fixed_time(ISSUED)
    page.goto(page_path.as_uri())
    page.screenshot(path=target)
    context.close()
    size = target.stat().st_size
    if size > MOST_PICTURE_BYTES:
        sys.exit(f"{target.name} has {size} bytes, more than {MOST_PICTURE_BYTES}")


def take_pictures(folder: Path) -> list[Path]:
    """Take the pictures that README shows."""
    chromium = shutil.which("chromium") or shutil.which("chromium-browser")
    if chromium is None:
        sys.exit("Chromium is not installed: the pages are renewed, the pictures are not.")
    with sync_playwright() as playwright:
        browser = playwright.chromium.launch(executable_path=chromium, args=list(FLAGS))
        for name, page in PICTURES.items():
            take_picture(browser, folder / page, folder / name)
        browser.close()
    return [folder / name for name in PICTURES]


def main(arguments: Sequence[str]) -> None:
    parser = argparse.ArgumentParser(prog="python -m tests.sample_pages", description=__doc__)
    parser.add_argument("--folder", type=Path, default=SAMPLE, help="where the pages go")
    folder = parser.parse_args(arguments).folder.resolve()
    for path in (*publish_demo(folder), *take_pictures(folder)):
        print(f"{path.stat().st_size:>9,} {path.name}")


if __name__ == "__main__":
    main(sys.argv[1:])
