"""``rateloom show FILE``: what is read from one output file."""

import argparse
import json
import sys

from rateloom.cli.options import add_size_option, bytes_of
from rateloom.errors import CalculationError


def add_parser(subparsers: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    """Declare the command."""
    command = subparsers.add_parser("show", help="say what is read from output files, without a job")
    command.add_argument("files", metavar="FILE", nargs="+", help="output of a program, plain, .gz, .bz2 or .xz")
    command.add_argument("--json", action="store_true", help="one JSON object (a list of them for several files)")
    add_size_option(command)
    command.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Read and print every file; exit status 2 if one cannot be read."""
    from rateloom.calculation import as_json_dict, describe, read_calculation

    status, found = 0, []
    for path in args.files:
        try:
            calculation = read_calculation(path, largest=bytes_of(args))
        except CalculationError as error:
            print(error, file=sys.stderr)
            status = 2
            continue
        if args.json:
            found.append(as_json_dict(calculation))
        else:
            print(f"{path}\n{describe(calculation)}\n")
    if args.json and found:
        print(json.dumps(found if len(args.files) > 1 else found[0], indent=1, allow_nan=False))
    return status
