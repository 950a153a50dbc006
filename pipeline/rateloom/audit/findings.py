"""Findings: remarks with a subject, a severity and, where the job file gives one, the reason for accepting it."""

from collections.abc import Collection, Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches

from rateloom.audit.codes import CODES, SEVERITIES
from rateloom.errors import UnknownCodeError
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Subject:
    """What a finding is about."""

    kind: str
    """``species``, ``transition_state``, ``reaction`` or ``job``."""
    name: str


@dataclass(frozen=True, slots=True)
class Finding:
    """One row of the audit."""

    subject: Subject
    code: str
    severity: str
    message: str
    value: str = ""
    limit: str = ""
    accepted_because: str = ""

    @property
    def withholds(self) -> bool:
        """Whether nothing that depends on the subject may be delivered."""
        return self.severity == "error" and not self.accepted_because

    @property
    def rank(self) -> tuple[int, str, str, str, str]:
        """Order of the audit table: gravest first, then by code and subject."""
        return SEVERITIES.index(self.severity), self.code, self.subject.kind, self.subject.name, self.message


def judge(
    subject: Subject,
    remarks: Iterable[Remark],
    accept: Mapping[str, str],
    severities: Mapping[str, str],
) -> list[Finding]:
    """Make findings of the remarks about one subject.

    Parameters
    ----------
    subject
        Whom the remarks are about.
    remarks
        Equal ones are one finding.
    accept
        Reason by code, for this subject.
    severities
        Severity by code where the job file sets one.

    Raises
    ------
    KeyError
        A remark has a code that is not in the table.
    """
    return [
        Finding(
            subject,
            remark.code,
            severities.get(remark.code) or CODES[remark.code],
            _sentence(remark.message),
            remark.value,
            remark.limit,
            accept.get(remark.code, ""),
        )
        for remark in dict.fromkeys(remarks)
    ]


def _sentence(message: str) -> str:
    """Begin with a capital, unless a name or a file begins the message, and end with a full stop."""
    first = message.split(maxsplit=1)[0].rstrip(":,") if message else ""
    if first.isalpha() and first.islower():
        message = message[0].upper() + message[1:]
    return message if message.endswith((".", "?", ")")) else f"{message}."


def unmatched_accepts(subject: Subject, accept: Mapping[str, str], found: Iterable[Finding]) -> list[Remark]:
    """Remark on each code that a job file accepts for a subject but that was not found.

    Parameters
    ----------
    subject
        Where the ``accept`` stands.
    accept
        Reason by code.
    found
        Findings that it may match.
    """
    codes = {finding.code for finding in found}
    return [
        Remark(
            "accept-matches-nothing",
            f"the job file accepts '{code}' for {subject.name}, but nothing of the kind was found: remove the line",
            value=code,
        )
        for code in sorted(set(accept) - codes)
    ]


def withholding(findings: Iterable[Finding]) -> dict[Subject, list[Finding]]:
    """Give the findings that withhold something, by subject."""
    found: dict[Subject, list[Finding]] = {}
    for finding in findings:
        if finding.withholds:
            found.setdefault(finding.subject, []).append(finding)
    return found


def check_codes(codes: Collection[str]) -> frozenset[str]:
    """Make sure that codes a user typed are in the table.

    Raises
    ------
    UnknownCodeError
        One is not; the error names the closest.
    """
    for code in codes:
        if code not in CODES:
            raise UnknownCodeError(code, tuple(get_close_matches(code, CODES, 3, 0.4)))
    return frozenset(codes)


def fails(findings: Iterable[Finding], severity: str) -> bool:
    """Tell whether any finding of this severity or a graver one has not been accepted."""
    worst = SEVERITIES.index(severity)
    return any(SEVERITIES.index(f.severity) <= worst and not f.accepted_because for f in findings)
