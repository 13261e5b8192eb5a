"""A sound plan has no findings; each planted fault is found by its own code."""

from __future__ import annotations

import pytest

from georoute.audit import audit
from georoute.domain.findings import Severity
from georoute.domain.plan import Plan
from georoute.domain.programme import TravelMethod
from tests.store_breaches import BREACHES, Breach
from tests.store_helpers import example_plan


@pytest.fixture(scope="module")
def sound() -> Plan:
    return example_plan()


@pytest.mark.parametrize(
    "method", [TravelMethod.DETOUR, TravelMethod.GEODESIC, TravelMethod.GREAT_CIRCLE]
)
def test_sound_plan_has_no_findings(method: TravelMethod) -> None:
    assert audit(example_plan(method)) == ()


def test_enough_kinds_of_faults_are_planted() -> None:
    assert len(BREACHES) >= 30
    assert len({name for name, _, _ in BREACHES}) == len(BREACHES)


@pytest.mark.parametrize(
    ("code", "breach"), [pytest.param(code, breach, id=name) for name, code, breach in BREACHES]
)
def test_planted_fault_is_found(code: str, breach: Breach, sound: Plan) -> None:
    findings = [finding for finding in audit(breach(sound)) if finding.code == code]
    assert findings, f"no finding of code {code}"
    for finding in findings:
        assert finding.severity is Severity.FAULT
        assert finding.subject
        assert finding.remedy
        assert "expected" in finding.message
        assert "got" in finding.message


def test_message_names_tour_stop_expected_and_got(sound: Plan) -> None:
    (breach,) = (breach for name, _, breach in BREACHES if name == "stop at another site")
    (finding,) = (f for f in audit(breach(sound)) if f.code == "wrong_site")
    assert "2026-10-23|anna" in finding.message
    assert "stop 1 00|lift|1" in finding.message
    assert "expected 00, got 03" in finding.message
