"""The office page: what the plan costs, where its hours go, and how well it is balanced."""

from __future__ import annotations

from typing import TYPE_CHECKING

from markupsafe import Markup

from georoute.publishing.frame import environment, own, policy, program_of
from georoute.publishing.island import island_json
from georoute.publishing.names import OVERVIEW_NAME
from georoute.publishing.office_view import office_view

if TYPE_CHECKING:
    from georoute.publishing.page_values import Edition

__all__ = ["office_page"]

_SCRIPTS = ("base.js",)
_STYLES = ("page.css", "office.css", "print.css")


def office_page(edition: Edition) -> str:
    """Return the office page as HTML; it has no map and needs no map library."""
    styles = [own(name) for name in _STYLES]
    program = program_of(_SCRIPTS)
    view = office_view(edition)
    return (
        environment()
        .get_template("office.html")
        .render(
            **edition.common(),
            title=f"{edition.figures.words('office_page')}: {view.title}",
            view=view,
            overview_href=OVERVIEW_NAME,
            policy=policy([program], styles),
            head=Markup("\n".join(f"<style>{style}</style>" for style in styles)),  # noqa: S704  # our own style sheets
            program=Markup(program),  # noqa: S704  # our own scripts
            island=Markup(island_json({"words": {}})),  # noqa: S704  # escaped by island_json
        )
    )
