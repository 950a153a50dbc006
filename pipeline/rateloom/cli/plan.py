"""``rateloom plan JOB``: say what a run would compute, and why; compute nothing."""

import argparse


def add_parser(subparsers: "argparse._SubParsersAction[argparse.ArgumentParser]") -> None:
    """Add the command to the command line."""
    parser = subparsers.add_parser(
        "plan",
        help="say what a run would compute, and why; compute nothing",
        description="Say what a run would compute, and why; compute nothing.",
    )
    parser.add_argument("job", metavar="JOB", help="the job file (YAML)")
    parser.add_argument("--output", metavar="DIR", help="look there instead of in the folder that the job file names")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Print the plan of a job."""
    from rateloom.batch import plan_job

    print(plan_job(args.job, output=args.output).text())
    return 0
