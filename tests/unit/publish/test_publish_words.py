"""The catalogue of words: complete in each language, and used."""

from __future__ import annotations

import re
from pathlib import Path
from string import Formatter

import pytest

import georoute.publishing
from georoute.domain.cautions import CAUTION
from georoute.domain.plan import ReasonCode, StopRule
from georoute.publishing.words import LANGUAGES, words_for

FOLDER = Path(georoute.publishing.__file__).parent
ENGLISH = LANGUAGES["en"]
# ids put together from a prefix
BUILT = ("theme_", "reason_", "stage_", "stop_rule_", "cost_", "rate_")


def places(text: str) -> set[str]:
    return {name for _, name, _, _ in Formatter().parse(text) if name}


def used_ids() -> set[str]:
    """Find all quoted words of the sources, and ``words.id`` of the scripts."""
    sources = [path for path in FOLDER.rglob("*") if path.suffix in {".py", ".html", ".js"}]
    text = "\n".join(p.read_text("utf-8") for p in sources if not p.name.startswith("words"))
    return set(re.findall(r"[\"']([a-z_]+)[\"']", text)) | set(re.findall(r"words\.(\w+)", text))


@pytest.mark.parametrize("language", sorted(LANGUAGES))
def test_every_language_has_the_same_ids_and_places(language: str) -> None:
    texts = LANGUAGES[language]
    assert set(texts) == set(ENGLISH)
    differing = [key for key in ENGLISH if places(texts[key]) != places(ENGLISH[key])]
    assert differing == []


@pytest.mark.parametrize("language", sorted(LANGUAGES))
def test_lists_are_whole(language: str) -> None:
    words = words_for(language)
    for key, count in (
        ("weekdays", 7),
        ("weekdays_short", 7),
        ("months", 12),
        ("months_short", 12),
    ):
        assert len(set(words.listed(key))) == count


def test_every_reason_and_stop_rule_has_words() -> None:
    wanted = {f"reason_{code.value}" for code in ReasonCode}
    wanted |= {f"stop_rule_{rule.name.lower()}" for rule in StopRule}
    assert wanted <= set(ENGLISH)


def test_every_stage_of_the_search_has_words() -> None:
    # what the search calls its stages is told in the plan; the page says it in its language
    notes = re.findall(
        r"""\.note\("([^"]+)"\)""",
        "".join(p.read_text("utf-8") for p in (FOLDER.parent / "pipeline").glob("*.py")),
    )
    assert len(notes) >= 3
    for note in notes:
        assert f"stage_{note.replace(' ', '_')}" in ENGLISH


def test_no_word_is_idle_and_none_is_missing() -> None:
    used = used_ids()
    idle = [key for key in ENGLISH if key not in used and not key.startswith(BUILT)]
    assert idle == []
    templates = "\n".join(p.read_text("utf-8") for p in (FOLDER / "templates").glob("*.html"))
    asked = set(re.findall(r"words\('(\w+)'", templates))
    assert asked - set(ENGLISH) - {"theme_"} == set()


def test_caution_is_the_agreed_text() -> None:
    assert ENGLISH["caution_text"].replace("\u2013", "-") == CAUTION


def test_unknown_language_is_refused_with_a_choice() -> None:
    with pytest.raises(ValueError, match=r"'xx'.*en, es"):
        words_for("xx")
