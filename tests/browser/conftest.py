"""One browser for all tests of the pages, and pages that may not speak or reach out."""

from __future__ import annotations

import shutil
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from datetime import UTC, datetime
from pathlib import Path

import pytest
from playwright.sync_api import Browser, Page, Route, sync_playwright

from georoute.publishing import publish
from tests.conftest import absent
from tests.publish_helpers import hostile_plan, sample_plan, with_late_stop

FLAGS = (
    "--headless",
    "--no-sandbox",
    "--disable-gpu",
    "--disable-quic",
    "--no-first-run",
    "--disable-background-networking",
    "--disable-component-update",
    "--disable-sync",
)
DAY_BEFORE = datetime(2026, 3, 1, 12, 0, tzinfo=UTC)
ISSUED = datetime(2026, 3, 1, 17, 5, tzinfo=UTC)


@dataclass
class Watch:
    """Everything a page said or asked for beyond its own file."""

    events: list[str] = field(default_factory=list)

    def follow(self, page: Page) -> None:
        page.on("console", lambda message: self.events.append(f"console: {message.text}"))
        page.on("pageerror", lambda error: self.events.append(f"error: {error}"))
        page.on("dialog", lambda dialog: self.events.append(f"dialog: {dialog.message}"))

    def route(self, route: Route) -> None:
        if (
            route.request.url.startswith(("file:", "data:"))
            and route.request.is_navigation_request()
        ):
            route.continue_()
        else:
            self.events.append(f"request: {route.request.url}")
            route.abort()


@pytest.fixture(scope="session")
def browser() -> Iterator[Browser]:
    chromium = shutil.which("chromium") or shutil.which("chromium-browser")
    if chromium is None:
        absent("browser", "Chromium is not installed")
    with sync_playwright() as playwright:
        running = playwright.chromium.launch(executable_path=chromium, args=list(FLAGS))
        yield running
        running.close()


@pytest.fixture
def open_page(browser: Browser) -> Iterator[Callable[..., Page]]:
    """Open a page at a size and a moment; afterwards it must have said and asked nothing."""
    watch = Watch()
    contexts = []

    def open_it(
        path: Path,
        *,
        size: tuple[int, int] = (1400, 900),
        now: datetime = DAY_BEFORE,
        theme: str = "",
    ) -> Page:
        context = browser.new_context(viewport={"width": size[0], "height": size[1]})
        contexts.append(context)
        context.route("**/*", watch.route)
        page = context.new_page()
        watch.follow(page)
        page.clock.set_fixed_time(now)
        page.goto(path.as_uri())
        if theme:
            page.locator(f"input[value={theme}]").check()
        return page

    yield open_it
    for context in contexts:
        context.close()
    assert watch.events == []


@pytest.fixture(scope="session")
def one_day(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, ...]:
    """Overview, day page and run sheet of a day with a wait and a late stop."""
    folder = tmp_path_factory.mktemp("one_day")
    return publish(with_late_stop(sample_plan()), folder, issued=ISSUED)


@pytest.fixture(scope="session")
def many_days(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, ...]:
    """The pages of three inspectors over five days, with three visits not placed."""
    plan = sample_plan(days=5, people=3, stops=9, unplaced=3)
    return publish(plan, tmp_path_factory.mktemp("many_days"))


@pytest.fixture(scope="session")
def hostile_pages(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, ...]:
    return publish(hostile_plan(), tmp_path_factory.mktemp("hostile"))
