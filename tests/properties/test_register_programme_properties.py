"""Odd programme files never crash: they are faults with remedies, or programmes."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import HealthCheck, example, given, settings
from hypothesis import strategies as st

from georoute.domain.programme import Programme
from georoute.errors import GeorouteError
from georoute.register import check_programme, programme_fields, read_programme
from georoute.register.toml_lines import KeyLines
from tests.register_programme_faults import GOOD

SHARES_A_FOLDER = settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
LINES = GOOD.splitlines()
KEYS = sorted({row.key.rpartition(" ")[2].rpartition(".")[2] for row in programme_fields()})
VALUES = [
    "1",
    "-1",
    "0",
    "nan",
    "inf",
    "1e400",
    "9" * 400,
    "true",
    '""',
    '"north"',
    '"2027-03-01"',
    '"08:00"',
    "2027-03-01",
    "0001-01-01",
    "9999-12-31",
    "08:00:00",
    "2027-03-01T08:00:00Z",
    "[]",
    "[[]]",
    "{}",
    "{ date = 1 }",
    "[{ date = 2027-03-03 }]",
    '["mon", 9]',
    '"a\\u0000b"',
    '"\\u202e"',
    '"../../x"',
]
HEADS = ["[shift]", "[[shift]]", "[base]", "[[base]]", "[[inspector]]", "[travel.detour]", "[a.b]"]


DOCUMENT = """\
a = 1 # [no]
b = '''
c = 2
[no]'''
d = [
  [1],
] # e = 3
[f.g]
"h i" = 4
j.k = { l = 5 }
[[m]]
n = 'x = ['
[m.o]
p = 6
[[m]]
n = 7
[[m.q]]
[[m.q]]
r = 8
"""


def judge(path: Path) -> None:
    findings = check_programme(path)
    assert all(finding.remedy and finding.message for finding in findings)
    if any(finding.is_fault for finding in findings):
        with pytest.raises(GeorouteError) as caught:
            read_programme(path)
        assert caught.value.findings == findings
    else:
        programme = read_programme(path)
        assert isinstance(programme, Programme)
        programme.shifts()


@SHARES_A_FOLDER
@given(data=st.binary(max_size=200))
@example(data=b"\xef\xbb\xbf")
@example(data=b"\r")
@example(data=b"[" * 5000)
def test_random_bytes_never_crash(data: bytes, tmp_path: Path) -> None:
    path = tmp_path / "programme.toml"
    path.write_bytes(data)
    judge(path)


@SHARES_A_FOLDER
@given(data=st.data())
def test_a_good_file_with_odd_lines_never_crashes(data: st.DataObject, tmp_path: Path) -> None:
    lines = list(LINES)
    for _ in range(data.draw(st.integers(1, 4))):
        k = data.draw(st.integers(0, len(lines) - 1))
        key = data.draw(st.sampled_from(KEYS))
        if "=" in lines[k] and data.draw(st.booleans()):
            key = lines[k].partition(" =")[0]
        odd = data.draw(st.sampled_from([*HEADS, *(f"{key} = {value}" for value in VALUES)]))
        if data.draw(st.booleans()):
            lines[k] = odd
        else:
            lines.insert(k, odd)
    path = tmp_path / "programme.toml"
    path.write_text("\n".join(lines), encoding="utf-8")
    judge(path)


@SHARES_A_FOLDER
@given(data=st.data())
def test_a_good_file_with_odd_letters_never_crashes(data: st.DataObject, tmp_path: Path) -> None:
    text = list(GOOD)
    for _ in range(data.draw(st.integers(1, 6))):
        text[data.draw(st.integers(0, len(text) - 1))] = data.draw(st.characters(codec="utf-8"))
    path = tmp_path / "programme.toml"
    path.write_text("".join(text), encoding="utf-8", newline="")
    judge(path)


def test_lines_of_keys_in_every_way_of_writing_them() -> None:
    lines = KeyLines(DOCUMENT)
    expected = {
        ("a",): 1,
        ("b",): 2,
        ("d",): 5,
        ("d", 0, 0): 5,
        ("f", "g"): 8,
        ("f", "g", "h i"): 9,
        ("f", "g", "j", "k"): 10,
        ("f", "g", "j", "k", "l"): 10,
        ("m",): 11,
        ("m", 0, "n"): 12,
        ("m", 0, "o", "p"): 14,
        ("m", 1): 15,
        ("m", 1, "n"): 16,
        ("m", 1, "q", 1): 18,
        ("m", 1, "q", 1, "r"): 19,
        ("m", 1, "absent"): 15,
        ("c",): None,
        ("e",): None,
        ("no",): None,
    }
    assert {path: lines.line_of(path) for path in expected} == expected
