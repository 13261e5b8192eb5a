"""Published files without a browser: same bytes, own files only, nothing from outside, no markup.

Outside checks: the hashes of Leaflet 1.9.4 are those its makers publish for subresource integrity
(leafletjs.com, quick start, "leaflet@1.9.4"); pages are read by the standard library's HTML parser.
"""

from __future__ import annotations

import base64
import hashlib
import json
import re
import subprocess
import sys
from dataclasses import replace
from datetime import UTC, datetime
from html.parser import HTMLParser
from importlib import resources
from pathlib import Path

import pytest

from georoute.errors import OutputError
from georoute.publishing import publish
from georoute.publishing.frame import leaflet_css, leaflet_js, slim_style
from tests.publish_helpers import HOSTILE, hostile_plan, sample_plan, with_late_stop

ISSUED = datetime(2026, 3, 1, 17, 5, tzinfo=UTC)
INTEGRITY = {
    "leaflet.js": "20nQCchB9co0qIjJZRGuk2/Z9VM+kNiyxNV1lvTlZBo=",
    "leaflet.css": "p4NxAoJBhIIN+hmNHrzRCf9tD/miZyoHS5obTRR9BMY=",
}


class Reader(HTMLParser):
    """Collects elements, attributes, the text of scripts and styles, and all other text."""

    def __init__(self, page: str) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.attributes: list[tuple[str, str, str]] = []
        self.blocks: list[tuple[str, dict[str, str | None], str]] = []
        self.words: list[str] = []
        self._open: tuple[str, dict[str, str | None]] | None = None
        self.feed(page)
        self.close()

    def handle_starttag(self, tag: str, attrs: list[tuple[str, str | None]]) -> None:  # type: ignore[explicit-override]  # typing.override is of Python 3.12
        self.tags.append(tag)
        self.attributes += [(tag, name, value or "") for name, value in attrs]
        self._open = (tag, dict(attrs)) if tag in {"script", "style"} else None
        if self._open:
            self.blocks.append((tag, dict(attrs), ""))

    def handle_data(self, data: str) -> None:  # type: ignore[explicit-override]  # as above
        if self._open:
            tag, attributes, text = self.blocks[-1]
            self.blocks[-1] = (tag, attributes, text + data)
        else:
            self.words.append(data)

    def handle_endtag(self, tag: str) -> None:  # type: ignore[explicit-override]  # noqa: ARG002  # as above
        self._open = None


def texts(paths: tuple[Path, ...]) -> list[str]:
    return [path.read_text("utf-8") for path in paths]


def source(text: str) -> str:
    return base64.b64encode(hashlib.sha256(text.encode()).digest()).decode()


@pytest.mark.parametrize("name", sorted(INTEGRITY))
def test_leaflet_is_the_official_file(name: str) -> None:
    data = (resources.files("js_lib_leaflet") / "static/js_lib_leaflet" / name).read_bytes()
    assert base64.b64encode(hashlib.sha256(data).digest()).decode() == INTEGRITY[name]


def test_leaflet_goes_in_with_its_licence_and_without_addresses() -> None:
    assert "BSD 2-Clause License" in leaflet_js()
    assert "Redistributions in binary form must reproduce" in leaflet_js()
    assert "sourceMappingURL" not in leaflet_js()
    # its images belong to controls that our maps draw themselves
    assert "url(" not in leaflet_css()
    assert ".leaflet-container{overflow:hidden}" in leaflet_css()
    assert ".leaflet-pane,.leaflet-tile,.leaflet-tile-container," in leaflet_css()
    assert "@media print{.leaflet-control{" in leaflet_css()
    # parts that our maps do not have
    assert not re.search("popup|tooltip|layers", leaflet_css())
    assert (
        "popup"
        in (resources.files("js_lib_leaflet") / "static/js_lib_leaflet/leaflet.css").read_text()
    )


@pytest.mark.parametrize(
    ("text", "slim"),
    [
        ("a  :hover , b { color : red ; }", "a :hover,b{color :red}"),
        ('q { content: "a ; b  {}" ; }', 'q{content:"a ; b  {}"}'),
        (
            "p { width: calc(1px + 2px); background: url( x;y.png ) }",
            "p{width:calc(1px + 2px);background:url( x;y.png )}",
        ),
        ("/* words; */ p { margin: 0 }\n\n/* { */ i { top: 0 }", "p{margin:0}i{top:0}"),
        (
            "@media (max-width: 3px) and (hover) { p { top: 0; } }",
            "@media (max-width:3px) and (hover){p{top:0}}",
        ),
    ],
)
def test_slimming_a_style_keeps_what_it_says(text: str, slim: str) -> None:
    assert slim_style(text) == slim


def test_pages_and_their_names(tmp_path: Path) -> None:
    pages = publish(
        sample_plan(days=2, people=2, stops=4), tmp_path / "new" / "maps", issued=ISSUED
    )
    assert [page.name for page in pages[:3]] == [
        "index.html",
        "day_2026-03-02_insp-1.html",
        "sheet_2026-03-02_insp-1.html",
    ]
    assert pages[-1].name == "office.html"
    assert len(pages) == 2 + 2 * 4
    assert sorted(pages) == sorted((tmp_path / "new" / "maps").iterdir())


def test_same_plan_gives_the_same_bytes_in_another_process(tmp_path: Path) -> None:
    plan = with_late_stop(sample_plan(stops=6), order=4)
    here = publish(plan, tmp_path / "here", issued=ISSUED)
    code = (
        "import sys; from datetime import UTC, datetime; from georoute.publishing import publish\n"
        "from tests.publish_helpers import sample_plan, with_late_stop\n"
        "publish(with_late_stop(sample_plan(stops=6), order=4), sys.argv[1], "
        "issued=datetime(2026, 3, 1, 17, 5, tzinfo=UTC))"
    )
    root = Path(__file__).resolve().parents[3]
    subprocess.run([sys.executable, "-c", code, str(tmp_path / "there")], check=True, cwd=root)
    for page in here:
        assert page.read_bytes() == (tmp_path / "there" / page.name).read_bytes()


def test_pages_are_small_and_carry_the_caution(tmp_path: Path) -> None:
    plans = (
        sample_plan(days=20, people=3, stops=12, unplaced=3),  # 60 tours in one table
        with_late_stop(sample_plan(stops=60)),
    )
    for plan in plans:
        for page in publish(plan, tmp_path):
            # 300 kB at most, of which roads and their names will want their part
            most = 290_000 if page.name == "index.html" else 265_000
            assert page.stat().st_size <= most
            text = " ".join("".join(Reader(page.read_text("utf-8")).words).split())
            assert "Local law, your employer's rules and licensed practice prevail." in text
            assert "Read or change the plan only while parked." in text


def test_every_page_language_carries_its_caution(tmp_path: Path) -> None:
    for text in texts(publish(sample_plan(stops=3), tmp_path, language="es")):
        assert '<html lang="es"' in text
        assert "Prevalecen la ley local" in text


def test_policy_names_the_scripts_that_are_there_and_nothing_is_fetched(tmp_path: Path) -> None:
    for text in texts(publish(sample_plan(stops=3), tmp_path)):
        reader = Reader(text)
        policy = next(v for t, n, v in reader.attributes if n == "content" and "default-src" in v)
        assert "default-src 'none'" in policy
        assert "unsafe" not in policy
        runnable = [b for tag, attrs, b in reader.blocks if tag == "script" and "type" not in attrs]
        styles = [b for tag, _, b in reader.blocks if tag == "style"]
        for block in runnable + styles:
            assert f"'sha256-{source(block)}'" in policy
        fetching = {"src", "srcset", "data", "poster", "background", "style"}
        assert [a for a in reader.attributes if a[1] in fetching] == []
        links = {value for _, name, value in reader.attributes if name == "href"}
        assert all(re.fullmatch(r"#[\w-]+|[\w.-]+\.html|geo:[-\d.,]+", link) for link in links)
        assert "link" not in reader.tags


def test_hostile_text_makes_no_markup(tmp_path: Path) -> None:
    quiet = publish(replace(sample_plan(stops=5, unplaced=1)), tmp_path / "quiet")
    hostile = publish(hostile_plan(), tmp_path / "hostile")
    for calm, evil in zip(texts(quiet), texts(hostile), strict=True):
        reader = Reader(evil)
        assert not {"img", "iframe"} & set(reader.tags)
        assert [a for a in reader.attributes if a[1].startswith("on")] == []
        kinds = [(tag, sorted(attrs)) for tag, attrs, _ in reader.blocks]
        assert kinds == [(tag, sorted(attrs)) for tag, attrs, _ in Reader(calm).blocks]
        words = "".join(reader.words)
        assert HOSTILE[1] in words
    day = Reader(hostile[1].read_text("utf-8"))
    assert all(text in "".join(day.words) for text in HOSTILE)
    island = next(b for tag, attrs, b in day.blocks if attrs.get("type") == "application/json")
    # names reach the map from the run list, never through the island of the page
    inside = json.dumps(json.loads(island))
    base = HOSTILE[1]
    assert [text for text in HOSTILE if json.dumps(text)[1:-1] in inside] == [base]
    assert len(json.loads(island)["tour"]["arrive"]) == len(HOSTILE)


def test_estimates_are_marked_and_measures_are_not(tmp_path: Path) -> None:
    plan = sample_plan(stops=3)
    measured = replace(
        plan, travel=replace(plan.travel, estimated=False, source="the user's own table")
    )
    marked = texts(publish(plan, tmp_path))[1]
    plain = texts(publish(measured, tmp_path))[1]
    assert "between 0.73 and 1.37 times the figure" in marked
    assert marked.count("≈") > 20
    assert "≈" not in re.sub(r"(?s)<script.*?</script>", "", plain)
    assert "Travel figures: the user&#39;s own table." in plain


def test_issue_time_is_the_one_handed_in_or_the_plans_own(tmp_path: Path) -> None:
    plan = sample_plan(stops=2)
    assert "not issued" in texts(publish(plan, tmp_path))[0]
    assert "issued 2026-03-01 14:05" in texts(publish(plan, tmp_path, issued=ISSUED))[0]
    own = replace(plan, provenance=replace(plan.provenance, issued=ISSUED, revision=3))
    overview = texts(publish(own, tmp_path))[0]
    assert "Revision 3" in overview
    assert "issued 2026-03-01 14:05" in overview


def test_no_bound_is_claimed_where_there_is_none(tmp_path: Path) -> None:
    page = texts(publish(sample_plan(stops=2), tmp_path))[1]
    assert "No bound computed yet: the order is improved, not proven." in page


def test_only_our_stale_pages_of_the_same_plan_go(tmp_path: Path) -> None:
    wide = sample_plan(days=2, stops=3)
    publish(wide, tmp_path)
    other = tmp_path / "day_2025-01-01_insp-1.html"
    other.write_text((tmp_path / "index.html").read_text("utf-8").replace(wide.plan_id, "0" * 36))
    mine = tmp_path / "day_2025-01-01_mine.html"
    mine.write_text("<title>my own notes</title>")
    left = publish(replace(wide, tours=wide.tours[:1]), tmp_path)
    assert sorted(tmp_path.iterdir()) == sorted([*left, other, mine])


def test_a_strangers_file_is_never_written_over(tmp_path: Path) -> None:
    stranger = tmp_path / "index.html"
    stranger.write_text("<h1>somebody's site</h1>")
    with pytest.raises(OutputError, match=r"did not make: index\.html\. Nothing was written"):
        publish(sample_plan(stops=2), tmp_path)
    assert [path.name for path in tmp_path.iterdir()] == ["index.html"]
    assert stranger.read_text() == "<h1>somebody's site</h1>"


def test_a_folder_that_is_a_file_is_refused(tmp_path: Path) -> None:
    (tmp_path / "maps").write_text("")
    with pytest.raises(OutputError, match="Choose another folder"):
        publish(sample_plan(stops=2), tmp_path / "maps")


def test_a_plan_without_tours_still_has_an_overview(tmp_path: Path) -> None:
    plan = replace(sample_plan(stops=2), tours=())
    overview, office = publish(plan, tmp_path)
    assert "nothing is placed" in overview.read_text("utf-8")
    assert "Visits placed after their due date: none." in office.read_text("utf-8")


def test_no_contact_of_a_site_in_a_file_name_or_on_the_overview(tmp_path: Path) -> None:
    plan = sample_plan(stops=4)
    pages = publish(plan, tmp_path)
    contacts = {site.contact for site in plan.sites if site.contact}
    assert contacts
    assert not any(contact in texts(pages)[0] for contact in contacts)


def test_importing_the_stage_loads_no_map_library() -> None:
    code = (
        "import sys, georoute.publishing;"
        "print([m for m in ('folium', 'jinja2', 'pyproj', 'geopandas') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], check=True, capture_output=True, text=True)
    assert done.stdout.strip() == "[]"
