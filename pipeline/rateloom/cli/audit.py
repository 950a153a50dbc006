"""``rateloom audit JOB``: read and check; no rates."""

import argparse

from rateloom.cli.options import add_job_options, bytes_of, workers_of
from rateloom.cli.progress import progress

FAIL_ON = ("error", "warning", "note")


def add_parser(subparsers: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    """Add the command to the command line."""
    parser = subparsers.add_parser(
        "audit",
        help="read and check; no rates",
        description="Read every calculation of a job and check it, the species and the reactions; compute no rates. "
        "What is read is kept in the store of the output folder; the tables there are not touched.",
    )
    add_job_options(parser)
    parser.add_argument("--json", action="store_true", help="write the findings as JSON")
    parser.add_argument(
        "--only", metavar="CODE", action="append", help="show findings of this code alone (repeatable)"
    )
    parser.add_argument(
        "--fail-on",
        choices=FAIL_ON,
        default="error",
        help="exit with status 1 if a finding of this severity or a graver one is not accepted (default: error)",
    )
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Audit a job, print the findings."""
    from rateloom.audit import check_codes, fails
    from rateloom.batch import FileLimits, audit_job
    from rateloom.cli.findings import print_findings

    wanted = check_codes(args.only or ())
    with progress() as report:
        findings = audit_job(
            args.job,
            output=args.output,
            workers=workers_of(args),
            scheduler=args.scheduler,
            limits=FileLimits(args.seconds_per_file, bytes_of(args)),
            sieve=args.sieve,
            progress=report,
        )
    shown = [finding for finding in findings if not wanted or finding.code in wanted]
    print_findings(shown, as_json=args.json)
    return int(fails(findings, args.fail_on))
