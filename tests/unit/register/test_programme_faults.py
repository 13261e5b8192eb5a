"""Every fault planted in a programme file is found at its line, with its key and a remedy."""

from __future__ import annotations

import re
from collections import Counter
from pathlib import Path

import pytest

from georoute.domain.findings import Finding
from georoute.errors import ProgrammeError
from georoute.register import CODE_MEANINGS, Code, check_programme, read_programme
from tests.register_programme_faults import FAULTS, GOOD


def check(tmp_path: Path, text: str | bytes) -> tuple[Finding, ...]:
    path = tmp_path / "programme.toml"
    path.write_bytes(text if isinstance(text, bytes) else text.encode())
    return check_programme(path)


def edited(line: str, new: str) -> tuple[str, range]:
    """Replace one line of the good file; return the text and the numbers of the new lines."""
    lines = GOOD.splitlines()
    k = lines.index(line)
    return "\n".join([*lines[:k], new, *lines[k + 1 :]]), range(k + 1, k + 2 + new.count("\n"))


def lines_of(text: str, key: str) -> set[int]:
    """Return the lines where a key stands, or the head of the section of that name."""
    name = re.sub(r"\[\d+\]$", "", key.rpartition(".")[2])
    pattern = re.compile(rf"{name}\s*=|\[+{name}\]+")
    return {n for n, line in enumerate(text.splitlines(), start=1) if pattern.match(line)}


def head_of(text: str, section: str) -> int | None:
    """Return the line of a section's head, of the second one for ``base[2]``."""
    name, _, index = section.rstrip("]").partition("[")
    heads = [n for n, line in enumerate(text.splitlines(), 1) if line.strip("[]") == name != line]
    return heads[int(index or 1) - 1] if section else None


def test_the_good_file_is_good(tmp_path: Path) -> None:
    assert check(tmp_path, GOOD) == ()


@pytest.mark.parametrize(("code", "key", "line", "new"), FAULTS)
def test_planted_faults_are_found_and_nothing_else(
    code: str, key: str, line: str, new: str, tmp_path: Path
) -> None:
    text, new_lines = edited(line, new)
    findings = check(tmp_path, text)
    assert {(f.column, f.code) for f in findings} == {(key, code)}
    assert all(f.remedy and f.file.endswith("programme.toml") for f in findings)
    finding = findings[0]
    assert finding.severity is CODE_MEANINGS[Code(code)][0]
    if code == "missing_roads":
        assert text.splitlines()[(finding.row or 0) - 1].startswith("[travel")
    elif code == "missing_table" or new == "#":
        assert finding.row == head_of(text, key.rpartition(".")[0])
    else:
        assert finding.row in lines_of(text, key)
        assert finding.row in new_lines or code in ("overtime_beyond_shift", "shift_times_equal")


def test_each_class_of_fault_is_planted_three_times() -> None:
    counts = Counter(code for code, *_ in FAULTS)
    assert {code for code, count in counts.items() if count < 3} == set()


def test_all_faults_are_reported_at_once(tmp_path: Path) -> None:
    text = GOOD
    edits = {
        'zone = "America/Santiago"': 'zone = "Santiago"',
        "last_date = 2027-03-05": "last_date = 2027-02-05",
        "overtime_limit_h = 1": "overtime = 1",
        'start_base = "north"': 'start_base = "nroth"',
        "hour = 20": "hour = -1",
        'method = "detour"': 'method = "streets"',
        "seed = 7": "seed = 7.5",
        'effort = "normal"': 'effort = "best"',
    }
    for line, new in edits.items():
        text = text.replace(line, new)
    findings = check(tmp_path, text)
    assert [f.code for f in findings] == [
        "unknown_zone",
        "last_before_first",
        "unknown_key",
        "unknown_base",
        "negative_money",
        "unknown_travel_method",
        "wrong_type",
        "unknown_effort",
    ]
    assert [f.row for f in findings] == sorted(f.row or 0 for f in findings)
    with pytest.raises(ProgrammeError, match=r"8 faults; the first \(line 2\): zone: ") as caught:
        read_programme(tmp_path / "programme.toml")
    assert caught.value.findings == findings


@pytest.mark.parametrize(
    ("text", "line"),
    [
        ('title = "a"\nzone = ', 2),
        ("title = a\n", 1),
        ('title = "a"\n\n[tariff\nhour = 1', 3),
        ("a = 1\na = 2\n", 2),
        ("a = 2027-13-01\n", 1),
        ("[a]\n[a]\n", 2),
    ],
)
def test_broken_toml_has_its_line(text: str, line: int, tmp_path: Path) -> None:
    (finding,) = check(tmp_path, text)
    assert (finding.code, finding.row) == ("toml_syntax", line)


@pytest.mark.parametrize("text", ["a = " + "[" * 100_000, "a = " + "9" * 10_000])
def test_monstrous_values_are_a_fault(text: str, tmp_path: Path) -> None:
    (finding,) = check(tmp_path, text)
    assert finding.code == "toml_syntax"


def test_files_that_hold_no_programme(tmp_path: Path) -> None:
    assert [f.code for f in check(tmp_path, "")] == ["empty_file"]
    assert [f.code for f in check(tmp_path, "\n \n")] == ["empty_file"]
    assert [(f.code, f.row) for f in check(tmp_path, b"a = 1\nb = '\xff'")] == [
        ("unknown_encoding", 2)
    ]
    assert [f.code for f in check_programme(tmp_path / "no.toml")] == ["file_not_found"]
    assert [f.code for f in check_programme(tmp_path)] == ["not_readable"]
    assert {f.code for f in check(tmp_path, "# nothing")} == {"missing_key"}


@pytest.mark.parametrize(
    "edits",
    [
        {"first_date = 2027-03-01": "first_date = 2027-03-06", "2027-03-05": "2027-03-07"},
        {'weekdays = ["mon", "tue", "wed", "thu", "fri"]': "weekdays = []"},
        {"2027-03-05": "2027-03-02", "2027-03-01": "2027-03-02"},
        {"2027-03-05": "2027-12-25", "first_date = 2027-03-01": "first_date = 2027-12-25"},
    ],
)
def test_a_programme_without_a_working_day(edits: dict[str, str], tmp_path: Path) -> None:
    text = GOOD
    for line, new in edits.items():
        text = text.replace(line, new)
    assert [(f.code, f.column) for f in check(tmp_path, text)] == [("no_working_day", "last_date")]


def test_an_inspector_without_a_working_day_is_a_warning(tmp_path: Path) -> None:
    text = GOOD.replace('end_base = "north"', "weekdays = [7]")
    assert [(f.code, f.column) for f in check(tmp_path, text)] == [
        ("inspector_without_day", "inspector[2]")
    ]
    assert len(read_programme(tmp_path / "programme.toml").shifts()) == 4


def test_a_shift_stated_nowhere(tmp_path: Path) -> None:
    text = GOOD.replace('shift_start = "08:00"\n', "")
    assert [(f.code, f.column) for f in check(tmp_path, text)] == [
        ("missing_key", "inspector[1].shift_start"),
        ("missing_key", "inspector[2].shift_start"),
    ]
