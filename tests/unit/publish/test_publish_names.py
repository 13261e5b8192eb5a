"""File names of pages and the data island: safe whatever users write."""

from __future__ import annotations

import json
import re
from datetime import date

from hypothesis import given
from hypothesis import strategies as st

from georoute.publishing.island import island_json
from georoute.publishing.names import PAGE_PATTERN, page_name, slug, slugs_of
from georoute.publishing.page_values import near_lon


@given(st.lists(st.text(), unique=True, max_size=8))
def test_names_are_safe_and_all_different(ids: list[str]) -> None:
    slugs = slugs_of(ids)
    assert len(set(slugs.values())) == len(ids)
    for text in slugs.values():
        name = page_name("day", date(2026, 3, 2), text)
        assert PAGE_PATTERN.fullmatch(name)
        assert len(name) < 80


def test_slugs_read_like_the_ids() -> None:
    assert slug("Iñigo Núñez / Ñuñoa") == "inigo-nunez-nunoa"
    assert slugs_of(["A b", "a-B", "東京"]) == {"A b": "a-b", "a-B": "a-b-2", "東京": "inspector-3"}


def test_a_number_given_does_not_meet_a_slug_taken() -> None:
    assert len(set(slugs_of(["a", "a!", "a-2"]).values())) == 3


@given(st.dictionaries(st.text(), st.text() | st.integers() | st.none()))
def test_island_is_json_that_cannot_end_its_block(data: dict[str, object]) -> None:
    text = island_json(data)
    assert json.loads(text) == data
    assert not re.search("[<>&\u2028\u2029]", text)


@given(st.floats(-720, 720), st.floats(-180, 180))
def test_longitudes_stay_near_the_reference(lon: float, reference: float) -> None:
    near = near_lon(lon, reference)
    assert abs(near - reference) <= 180 + 1e-9
    assert abs((near - lon) / 360 - round((near - lon) / 360)) < 1e-9
