"""Options that several commands have."""

import argparse
import os


def add_job_options(parser: argparse.ArgumentParser) -> None:
    """Add what every command that computes takes."""
    parser.add_argument("job", metavar="JOB", help="the job file (YAML)")
    parser.add_argument("--workers", type=_count, metavar="N", help="processes to compute with (default: the cores)")
    parser.add_argument("--output", metavar="DIR", help="use this folder instead of the one that the job file names")


def workers_of(args: argparse.Namespace) -> int:
    """Give the number of workers asked for, or as many as this process may use cores."""
    return args.workers or len(os.sched_getaffinity(0))


def _count(text: str) -> int:
    """Read a number of workers.

    Raises
    ------
    argparse.ArgumentTypeError
        It is not a whole number above zero.
    """
    if not text.isdecimal() or int(text) == 0:
        msg = f"{text!r} is not a whole number above zero"
        raise argparse.ArgumentTypeError(msg)
    return int(text)
