"""Options that several commands have."""

import argparse
import os
from urllib.parse import urlsplit

LARGEST_FILE_MB = 1000
SECONDS_PER_FILE = 600
"""The defaults of the rooms that read, written here so that help is shown without loading them."""


def add_job_options(parser: argparse.ArgumentParser) -> None:
    """Add what every command that computes takes."""
    parser.add_argument("job", metavar="JOB", help="the job file (YAML)")
    where = parser.add_mutually_exclusive_group()
    where.add_argument("--workers", type=_count, metavar="N", help="processes to compute with (default: the cores)")
    where.add_argument(
        "--scheduler",
        type=_address,
        metavar="ADDRESS",
        help="compute on the workers of this Dask scheduler, tcp://HOST:PORT or tls://HOST:PORT "
        "(certificates: those of the configuration of Dask)",
    )
    parser.add_argument("--output", metavar="DIR", help="use this folder instead of the one that the job file names")
    add_size_option(parser)
    parser.add_argument(
        "--no-sieve",
        dest="sieve",
        action="store_false",
        help="show cclib every line of an output: slower, the same records",
    )
    parser.add_argument(
        "--seconds-per-file",
        type=_count,
        default=SECONDS_PER_FILE,
        metavar="N",
        help="give up a file whose reading takes longer (default: %(default)s)",
    )


def add_size_option(parser: argparse.ArgumentParser) -> None:
    """Add what every command that reads outputs takes."""
    parser.add_argument(
        "--largest-file",
        type=_count,
        default=LARGEST_FILE_MB,
        metavar="MB",
        help="read no file that is larger, as it is or unpacked (default: %(default)s)",
    )


def bytes_of(args: argparse.Namespace) -> int:
    """Give the size of the largest file that may be read."""
    return int(args.largest_file) * 1_000_000


def workers_of(args: argparse.Namespace) -> int:
    """Give the number of workers asked for, or as many as this process may use cores."""
    return args.workers or len(os.sched_getaffinity(0))


def _count(text: str) -> int:
    """Read a number of things.

    Raises
    ------
    argparse.ArgumentTypeError
        It is not a whole number above zero.
    """
    if not text.isdecimal() or int(text) == 0:
        msg = f"{text!r} is not a whole number above zero"
        raise argparse.ArgumentTypeError(msg)
    return int(text)


def _address(text: str) -> str:
    """Read the address of a scheduler.

    Raises
    ------
    argparse.ArgumentTypeError
        It is no such address.
    """
    try:
        parts = urlsplit(text)
        complete = (
            parts.scheme in {"tcp", "tls"} and parts.hostname and parts.port and text.endswith(f":{parts.port}")
        )
    except ValueError:
        complete = False
    if not complete:
        msg = f"{text!r} is not an address such as tcp://node7:8786 or tls://node7:8786"
        raise argparse.ArgumentTypeError(msg)
    return text
