"""``rateloom run JOB``: compute what is out of date and write the tables."""

import argparse
import sys

from rateloom.cli.options import add_job_options, bytes_of, workers_of
from rateloom.cli.progress import progress


def add_parser(subparsers: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    """Add the command to the command line."""
    parser = subparsers.add_parser(
        "run",
        help="compute what is out of date and write the tables",
        description="Compute what is out of date and write the tables. Nothing is computed twice: what an "
        "interrupted or earlier run has finished is taken from the store in the output folder.",
    )
    add_job_options(parser)
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Run a job, print its summary."""
    from rateloom.batch import unchanged_run

    summary = unchanged_run(args.job, args.output) if args.sieve else None
    if summary is None:
        from rateloom.batch import FileLimits, run_job

        with progress() as report:
            summary = run_job(
                args.job,
                output=args.output,
                workers=workers_of(args),
                scheduler=args.scheduler,
                limits=FileLimits(args.seconds_per_file, bytes_of(args)),
                sieve=args.sieve,
                progress=report,
            )
    for fault in summary.faults:
        print(f"A fault of the program in {fault}", file=sys.stderr)
    print(summary.text())
    return summary.exit_status
