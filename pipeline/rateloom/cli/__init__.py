"""The command line: one thin module a command, one place that turns errors into messages and exit statuses.

Nothing here imports numpy, scipy or cclib before a command needs it.
"""

import argparse
import os
import sys
import tempfile
import traceback
from collections.abc import Sequence

from rateloom import __version__
from rateloom.cli import audit as audit
from rateloom.cli import plan as plan
from rateloom.cli import run as run
from rateloom.cli import show as show
from rateloom.errors import RateloomError

COMMANDS = (run, plan, audit, show)

DELIVERED, WITHHELD, UNUSABLE, FAULT, INTERRUPTED = 0, 1, 2, 3, 130


def parser() -> argparse.ArgumentParser:
    """Make the parser of the command line."""
    top = argparse.ArgumentParser(
        prog="rateloom",
        description="From finished quantum-chemistry calculations to an audited table of rate coefficients.",
        epilog="Exit status: 0 all delivered, 1 some reactions withheld, 2 the job cannot be run, "
        "3 a fault of the program, 130 interrupted.",
    )
    top.add_argument("--version", action="version", version=f"rateloom {__version__}")
    subparsers = top.add_subparsers(title="commands", metavar="COMMAND", required=True)
    for command in COMMANDS:
        command.add_parser(subparsers)
    return top


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command and give its exit status; the only place where errors are printed."""
    # Set before numpy is loaded: one thread a process, whatever the number of workers.
    for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS"):
        os.environ.setdefault(name, "1")
    args = parser().parse_args(arguments)
    try:
        return args.run(args)
    except RateloomError as error:
        print(error, file=sys.stderr)
        return UNUSABLE
    except KeyboardInterrupt:
        print("Interrupted; what was finished is kept, run again to go on.", file=sys.stderr)
        return INTERRUPTED
    except BrokenPipeError:
        # The reader of our output has gone, as with `| head`.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return DELIVERED
    except Exception as error:
        with tempfile.NamedTemporaryFile("w", prefix="rateloom-", suffix=".txt", delete=False) as file:
            traceback.print_exc(file=file)
        print(
            f"A fault of the program: {type(error).__name__}: {error}\n"
            f"    Nothing of an earlier result was touched. Please report it with {file.name}",
            file=sys.stderr,
        )
        return FAULT
