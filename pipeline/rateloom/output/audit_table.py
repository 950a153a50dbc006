"""The audit as rows of ``audit.csv``."""

from collections.abc import Iterable

from rateloom.audit import Finding
from rateloom.output.numbers import rows_text

HEADER = ("subject_kind", "subject", "finding", "severity", "value", "limit", "message", "accepted_because")


def findings_table(findings: Iterable[Finding]) -> bytes:
    """Write findings as CSV, gravest first."""
    rows = [
        (f.subject.kind, f.subject.name, f.code, f.severity, f.value, f.limit, f.message, f.accepted_because)
        for f in sorted(findings, key=lambda finding: finding.rank)
    ]
    return rows_text([HEADER, *rows]).encode()
