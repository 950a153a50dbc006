"""Findings as a table for a terminal or as JSON."""

import json
import sys
from collections.abc import Sequence

from rateloom.audit import Finding

COLOURS = {"error": "bold red", "warning": "yellow", "note": "cyan"}


def print_findings(findings: Sequence[Finding], *, as_json: bool) -> None:
    """Write findings to stdout, gravest first."""
    if as_json:
        print(json.dumps([_record(finding) for finding in findings], indent=1, ensure_ascii=False))
    elif findings:
        _print_table(findings)
    else:
        print("No findings.")


def _record(finding: Finding) -> dict[str, str]:
    """Give a finding the names of the columns of ``audit.csv``."""
    return {
        "subject_kind": finding.subject.kind,
        "subject": finding.subject.name,
        "finding": finding.code,
        "severity": finding.severity,
        "value": finding.value,
        "limit": finding.limit,
        "message": finding.message,
        "accepted_because": finding.accepted_because,
    }


def _print_table(findings: Sequence[Finding]) -> None:
    """Draw a table as wide as the terminal; plain text where stdout is none."""
    from rich.console import Console
    from rich.table import Table
    from rich.text import Text

    console = Console(width=None if sys.stdout.isatty() else 160, highlight=False)
    table = Table(box=None, pad_edge=False, header_style="bold")
    for heading in ("severity", "subject", "finding", "value", "limit", "what to know"):
        table.add_column(heading, overflow="fold", no_wrap=heading == "severity")
    for finding in findings:
        accepted = bool(finding.accepted_because)
        message = finding.message + (f" [accepted: {finding.accepted_because}]" if accepted else "")
        table.add_row(
            Text("accepted" if accepted else finding.severity, style="" if accepted else COLOURS[finding.severity]),
            *(Text(cell) for cell in (finding.subject.name, finding.code, finding.value, finding.limit, message)),
        )
    console.print(table)
