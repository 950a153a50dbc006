"""Findings: remarks with subject, severity and acceptance."""

import pickle

import pytest

from rateloom.audit import CODES, SEVERITIES, Finding, Subject, check_codes, fails, judge, withholding
from rateloom.errors import UnknownCodeError
from rateloom.remarks import Remark

CH4 = Subject("species", "CH4")


def finding(severity: str, accepted: str = "") -> Finding:
    return Finding(CH4, "soft-mode", severity, "", accepted_because=accepted)


def test_every_code_has_one_of_the_severities() -> None:
    assert set(CODES.values()) <= set(SEVERITIES)


@pytest.mark.parametrize(
    ("message", "sentence"),
    [
        ("the energy differs", "The energy differs."),
        ("calculations/a.out.gz: Cut.", "calculations/a.out.gz: Cut."),
        ("forward: too fast", "Forward: too fast."),
        ("H2 falls apart (twice)", "H2 falls apart (twice)"),
    ],
)
def test_a_message_is_a_sentence(message: str, sentence: str) -> None:
    assert judge(CH4, [Remark("soft-mode", message)], {}, {})[0].message == sentence


def test_a_code_that_nobody_wrote_down_is_a_fault() -> None:
    with pytest.raises(KeyError):
        judge(CH4, [Remark("no-such-code", "x")], {}, {})


def test_what_is_accepted_withholds_nothing() -> None:
    assert list(withholding([finding("error")])) == [CH4]
    assert withholding([finding("error", "seen"), finding("warning")]) == {}


@pytest.mark.parametrize(
    ("found", "severity", "failed"),
    [("error", "error", True), ("warning", "error", False), ("warning", "warning", True), ("error", "note", True)],
)
def test_failing_on_a_severity_includes_the_graver_ones(found: str, severity: str, failed: bool) -> None:
    assert fails([finding(found)], severity) is failed
    assert fails([finding(found, "seen")], severity) is False


def test_an_unknown_code_names_the_closest_and_survives_a_worker() -> None:
    with pytest.raises(UnknownCodeError) as caught:
        check_codes(["softmode"])

    assert "no finding is called 'softmode'. Closest: soft-mode" in str(caught.value)
    assert str(pickle.loads(pickle.dumps(caught.value))) == str(caught.value)
