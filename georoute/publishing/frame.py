"""The frame of a page with a map: folium's figure and map, with nothing fetched from anywhere.

folium writes the page as a Figure with a Map in it. Here both are kept, with three changes: the
links to other hosts are gone (Leaflet is read from its installed wheel and put into the page),
names of elements are fixed, so that the same plan gives the same bytes, and the page carries a
content security policy that names each of its scripts by hash. Text of users never passes
through a template of folium: layers read it from the data island of the page.
"""

from __future__ import annotations

import base64
import functools
import hashlib
import re
from importlib import metadata, resources
from typing import TYPE_CHECKING, Any

import folium
import jinja2
from branca.element import Element, Figure, MacroElement
from markupsafe import Markup

from georoute.publishing.island import island_json

if TYPE_CHECKING:
    from collections.abc import Mapping

__all__ = [
    "DataLayer",
    "Page",
    "SurveyMap",
    "environment",
    "leaflet_css",
    "leaflet_js",
    "own",
    "policy",
    "program_of",
    "slim_style",
]

_LEAFLET_FOLDER = "static/js_lib_leaflet"

_UNUSED = re.compile(
    r"popup|tooltip|layers|leaflet-bar|marker-icon|marker-shadow|div-icon|attribution|control-zoom|vml"
    r"|oldie|default-icon|zoom-box|leaflet-retina"
)
"""Parts of Leaflet that no map of ours has: controls and marks that we draw ourselves."""


@functools.cache
def environment() -> jinja2.Environment:
    """Return the templates of the pages: everything put into them is escaped."""
    return jinja2.Environment(
        loader=jinja2.PackageLoader("georoute.publishing", "templates"),
        autoescape=True,
        undefined=jinja2.StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
    )


def slim_style(text: str) -> str:
    """Return a style sheet without comments and the white space that means nothing.

    Strings and addresses stay as they are. Space before a colon stays too: in a selector
    ``li :focus`` is not ``li:focus``; so does space around signs, which ``calc()`` needs.
    """
    blank = r"(?:\s|/\*.*?\*/)"

    def slim(match: re.Match[str]) -> str:
        return match.group("kept") or match.group("mark") or ("" if match.group("after") else " ")

    slimmed = re.sub(
        r"""(?P<kept>"(?:[^"\\]|\\.)*"|'(?:[^'\\]|\\.)*'|url\([^)]*\))"""
        rf"|{blank}*(?P<mark>[{{}};,]){blank}*|(?P<after>(?<=:){blank}+)|{blank}+",
        slim,
        text,
        flags=re.DOTALL,
    )
    return slimmed.replace(";}", "}").strip()


@functools.cache
def own(name: str) -> str:
    """Return the text of one of our own assets (scripts and style sheets)."""
    asset = resources.files("georoute.publishing") / "assets" / name
    text = asset.read_text(encoding="utf-8")
    if name.endswith(".css"):
        return slim_style(text)
    # comments of whole lines and indentation are for readers of the source, not of the page
    lines = [line.strip() for line in text.splitlines()]
    return "\n".join(line for line in lines if line and not line.startswith("//"))


@functools.cache
def _leaflet(name: str) -> bytes:
    return (resources.files("js_lib_leaflet") / _LEAFLET_FOLDER / name).read_bytes()


def _plain_lines(data: bytes) -> str:
    """Decode with plain line ends: a browser reads no others, and hashes what it reads."""
    return data.decode("utf-8").replace("\r\n", "\n")


@functools.cache
def _leaflet_licence() -> str:
    """Return Leaflet's licence text, as its wheel carries it."""
    files = metadata.distribution("django-js-lib-leaflet").files or []
    text = next(file for file in files if file.name == "LICENSE").read_text(encoding="utf-8")
    return text.strip().replace("*/", "* /")


@functools.cache
def leaflet_js() -> str:
    """Return Leaflet's script under its licence, without the link to its source map."""
    script = _plain_lines(_leaflet("leaflet.js"))
    script = re.sub(r"//# sourceMappingURL=\S*\s*$", "", script)
    return f"/*!\n{_leaflet_licence()}\n*/\n{script}"


@functools.cache
def leaflet_css() -> str:
    """Return Leaflet's style sheet without addresses, and without what our maps do not have.

    Its images belong to controls and markers that our maps draw themselves.
    """
    style = _plain_lines(_leaflet("leaflet.css"))
    style = re.sub(r"\s*behavior:\s*url\([^)]*\);", "", style)  # for a browser long gone
    style = slim_style(re.sub(r"url\(images/[\w-]+\.png\)", "none", style))

    def used(rule: re.Match[str]) -> str:
        kept = [part for part in rule["selectors"].split(",") if not _UNUSED.search(part)]
        return f"{','.join(kept)}{{{rule['body']}}}" if kept else ""

    return re.sub(r"(?P<selectors>[^{}@]+)\{(?P<body>[^{}]*)\}", used, style)


def _hash_source(text: str) -> str:
    digest = hashlib.sha256(text.encode("utf-8", "replace")).digest()
    return f"'sha256-{base64.b64encode(digest).decode('ascii')}'"


class _Verbatim(Element):
    """A script or style sheet as it is; branca's Element would read it as a template."""

    def __init__(self, tag: str, text: str) -> None:
        super().__init__()
        self._name = f"verbatim_{tag}"
        self._id = hashlib.sha256(text.encode("utf-8")).hexdigest()
        self.tag = tag
        self.text = text

    # typing.override is of Python 3.12
    def render(self, **_kwargs: Any) -> str:  # type: ignore[explicit-override]  # noqa: ANN401  # branca's signature
        return f"<{self.tag}>{self.text}</{self.tag}>"


class SurveyMap(folium.Map):
    """The map of folium without its links; ``label`` is the id of its name among the words."""

    default_js: list[tuple[str, str]] = []  # noqa: RUF012  # folium's own attribute, kept empty
    default_css: list[tuple[str, str]] = []  # noqa: RUF012  # as above

    _template = folium.template.Template(
        "{% macro html(this, kwargs) %}"
        '<div class="folium-map" id="{{ this.get_name() }}" data-name="{{ this.label }}"></div>'
        "{% endmacro %}"
        "{% macro script(this, kwargs) %}"
        "const {{ this.get_name() }} = surveyMap("
        "{{ this.get_name()|tojson }}, {{ this.options|tojavascript }});\n"
        "{% endmacro %}"
    )

    def __init__(self, label: str) -> None:
        super().__init__(tiles=None, zoom_control=False)
        self._name = "survey_map"
        self._id = "0"
        self.label = label


class DataLayer(MacroElement):
    """A layer drawn by one of our own functions from the data island of the page."""

    _template = folium.template.Template(
        "{% macro script(this, kwargs) %}"
        "{{ this.function }}({{ this._parent.get_name() }});\n"
        "{% endmacro %}"
    )

    def __init__(self, function: str) -> None:
        super().__init__()  # type: ignore[no-untyped-call]  # branca's own lacks types
        self._name = "data_layer"
        self._id = function
        self.function = function


class Page(Figure):
    """A whole page around a map: folium's Figure with our own skeleton."""

    def __init__(
        self,
        *,
        template: str,
        scripts: tuple[str, ...],
        styles: tuple[str, ...],
        own_style: str = "",
    ) -> None:
        super().__init__()
        self._page_template = template
        self._scripts = scripts
        self.header = Element()
        self.header._parent = self  # noqa: SLF001  # as branca's own Figure does
        sheets = [leaflet_css(), *map(own, styles), *([own_style] if own_style else [])]
        self._styles = [_Verbatim("style", text) for text in sheets]
        self._library = _Verbatim("script", leaflet_js())
        for part in (*self._styles, self._library):
            self.header.add_child(part)

    def page_text(self, data: Mapping[str, object], values: Mapping[str, object]) -> str:
        """Return the page: ``data`` goes to its island, ``values`` to its template."""
        for child in self._children.values():
            child.render()
        calls = self.script.render()
        program = program_of(self._scripts, calls)
        scripts = [self._library.text, program]
        styles = [style.text for style in self._styles]
        return (
            environment()
            .get_template(self._page_template)
            .render(
                **values,
                policy=policy(scripts, styles),
                head=Markup("\n".join(part.render() for part in (*self._styles, self._library))),  # noqa: S704  # our own parts
                map_frame=Markup(self.html.render().strip()),  # noqa: S704  # the empty map element
                program=Markup(program),  # noqa: S704  # our own scripts
                island=Markup(island_json(data)),  # noqa: S704  # escaped by island_json
            )
        )


def program_of(scripts: tuple[str, ...], calls: str = "") -> str:
    """Return our own scripts as one program that leaves no names behind, with calls at its end."""
    return "\n".join(['(() => {\n"use strict";', *map(own, scripts), calls, "})();"])


def policy(scripts: list[str], styles: list[str]) -> str:
    """Return a content security policy: these scripts and styles, no more."""
    return "; ".join(
        [
            "default-src 'none'",
            "script-src " + (" ".join(map(_hash_source, scripts)) or "'none'"),
            "style-src " + " ".join(map(_hash_source, styles)),
            "base-uri 'none'",
            "form-action 'none'",
        ]
    )
