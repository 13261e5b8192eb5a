"""The office page without a browser: its plots to scale, its tables true, its words complete."""

from __future__ import annotations

import re
from dataclasses import replace
from pathlib import Path
from xml.etree import ElementTree as ET

import pytest

from georoute.domain.plan import Plan, ReasonCode, Unplaced
from georoute.publishing import publish
from georoute.publishing.driving_side import drives_on_left
from georoute.publishing.office_view import office_view
from georoute.publishing.page_values import Edition
from georoute.publishing.plots import bars, strip
from georoute.publishing.quality import spread_of
from tests.office_helpers import hand_plan
from tests.publish_helpers import sample_plan


def edition(plan: Plan, language: str = "en") -> Edition:
    return Edition.of(plan, issued=None, language=language)


def office_text(plan: Plan, folder: Path, language: str = "en") -> str:
    return publish(plan, folder, language=language)[-1].read_text("utf-8")


def test_bars_share_one_scale() -> None:
    plot = bars(
        [
            ("a", "40", [("ink", 0.0, 40.0), ("none", 40.0, 40.0)]),
            ("b", "10", [("ink", 0.0, 10.0), ("saved", 10.0, 40.0)]),
        ],
        title="t",
        text="d",
    )
    assert [(p.kind, p.x, p.width) for p in plot.rows[0].pieces] == [("ink", 0, 100)]
    assert [(p.kind, p.x, p.width) for p in plot.rows[1].pieces] == [
        ("ink", 0, 25),
        ("saved", 25, 75),
    ]
    assert bars([("a", "0", [("ink", 0.0, 0.0)])], title="t", text="d").rows[0].pieces == ()


def test_a_strip_has_whole_hours_at_its_ends() -> None:
    marks = [(6.5, "circle", "x"), (8.0, "square", "y")]
    plot = strip([("a", "", (0, False), marks, spread_of([6.5, 8.0]))], title="t", text="d")
    assert [hour for _, hour in plot.ticks] == ["6", "7", "8"]
    places = [x for x, _ in plot.ticks]
    (row,) = plot.rows
    assert row.marks[1].x == places[2]
    assert row.marks[0].x == pytest.approx((places[0] + places[1]) / 2)
    assert row.median == pytest.approx((row.marks[0].x + row.marks[1].x) / 2, abs=0.01)
    assert row.line is not None
    assert row.line.x + row.line.width == pytest.approx(places[2])


def test_a_strip_of_one_length_or_none_still_has_a_scale() -> None:
    same = strip(
        [("a", "", (0, False), [(8.0, "circle", "")], spread_of([8.0]))], title="t", text="d"
    )
    assert len(same.ticks) == 2
    none = strip([("a", "", (0, False), [], spread_of([]))], title="t", text="d")
    assert none.rows[0].line is None


def test_figures_are_those_worked_out_by_hand(tmp_path: Path) -> None:
    text = re.sub(r"<[^>]+>", " ", office_text(hand_plan(), tmp_path)).replace("\u202f", " ")
    for figure in (
        "206 250 CLP",  # 18.5 h, 0.5 h overtime, 120 km, 3 days
        "Travel share ≈ 14.7 %: drive / (drive + work + access)",
        "Visits placed after their due date: 2; days late at worst: 13.",
        "Visits overdue before the first date: 1, of which not placed: 0.",
        "Stops late for opening hours: 1, at worst by 20 min.",
        "Pairs of stops within 200 m of each other on different days: 1; stops concerned: 2.",
        "Week 10: Thu 5 Mar to Sun 8 Mar",
        "due 5 h 00 min, shifts 32 h 00 min",
        "Tours that cross themselves: 0 of 3.",
    ):
        assert figure in text


def test_weeks_short_of_hours_say_so() -> None:
    plan = hand_plan()
    (one, *rest) = plan.visits
    heavy = replace(one, work_s=50 * 3600.0)  # more than four shifts with overtime give
    view = office_view(edition(replace(plan, visits=(heavy, *rest))))
    weeks = next(section for section in view.sections if section.key == "weeks")
    assert weeks.table is not None
    # due by the first week: 50 + 0.5 + 2 + 1.5 h against 4 x (8 + 1) h; then 3.5 h against 18 h
    assert [row.cells[5] for row in weeks.table.rows] == ["18:00", "3:30"]
    assert "In a week marked short" in weeks.lines[-1]
    assert weeks.bar_plot is not None
    assert {piece.kind for piece in weeks.bar_plot.rows[0].pieces} == {
        "frame",
        "extra",
        "ink",
        "beyond",
    }


def test_reasons_are_counted_the_most_first(tmp_path: Path) -> None:
    plan = sample_plan(stops=2, unplaced=40)
    late = Unplaced(
        visit_id=plan.unplaced[0].visit_id,
        site_id=plan.unplaced[0].site_id,
        code=ReasonCode.AFTER_LATEST,
        message="",
    )
    plan = replace(
        plan, unplaced=(late, *(replace(e, code=ReasonCode.CLOSED) for e in plan.unplaced[1:]))
    )
    view = office_view(edition(plan))
    assert view.sections[0].key == "left"
    table = view.sections[0].table
    assert table is not None
    assert [row.cells[0] for row in table.rows] == ["39", "1"]
    assert table.rows[0].cells[1].endswith("and 9 more")
    assert office_text(plan, tmp_path).index("Not placed, by reason") < 40_000


@pytest.mark.parametrize("language", ["en", "es"])
def test_every_plot_has_title_description_and_a_table(tmp_path: Path, language: str) -> None:
    text = office_text(sample_plan(days=2, people=2, stops=4), tmp_path, language)
    plots = re.findall(r'(?s)<svg class="plot" .*?\n</svg>', text)
    assert len(plots) == 5
    for plot in plots:
        tree = ET.fromstring(plot)  # noqa: S314  # our own page
        title, desc = tree.find("title"), tree.find("desc")
        assert title is not None
        assert desc is not None
        assert tree.attrib["aria-labelledby"] == f"{title.attrib['id']} {desc.attrib['id']}"
        assert title.text
        assert len(desc.text or "") > 40
        assert re.search(r"^\s*<div class=\"scroll\"[^>]*>\s*<table>", text.split(plot)[1])


def test_register_is_named_without_its_folders(tmp_path: Path) -> None:
    plan = sample_plan(stops=2)
    for source in ("/srv/office/secret/register.csv", r"C:\office\secret\register.csv"):
        made = replace(plan.provenance, register_source=source)
        for page in publish(replace(plan, provenance=made), tmp_path):
            text = page.read_text("utf-8")
            assert "secret" not in text
            assert "register.csv" in text


def test_a_stage_without_words_keeps_its_own_name(tmp_path: Path) -> None:
    plan = sample_plan(stops=2)
    stages = (*plan.stages[:2], replace(plan.stages[2], stage="night shift swap"))
    assert "night shift swap" in office_text(replace(plan, stages=stages), tmp_path)


@pytest.mark.parametrize(
    ("zone", "left"),
    [
        # a few that are widely known, from memory
        ("Europe/London", True),
        ("Asia/Tokyo", True),
        ("Australia/Sydney", True),
        ("Africa/Nairobi", True),
        ("America/Santiago", False),
        ("Europe/Berlin", False),
        ("America/New_York", False),
        ("Nowhere/Else", False),
    ],
)
def test_driving_side_is_that_of_the_country(zone: str, left: bool) -> None:
    assert drives_on_left(zone) is left


def test_cords_lie_on_the_side_that_is_driven_on() -> None:
    plan = sample_plan(stops=4)
    british = replace(plan, programme=replace(plan.programme, zone="Europe/London"))
    assert edition(plan).side() == 1
    assert edition(british).side() == -1
