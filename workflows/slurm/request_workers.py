"""Asks Slurm for workers, each a small job of its own, and runs a job of rateloom on them as they come.

    python workflows/slurm/request_workers.py [OPTION]... JOB [OPTION OF rateloom run]...

Runs where it is started: on a machine that may call sbatch and that the nodes can reach, a login node or a small job.
Workers that reach their time limit are replaced. The exit status is that of rateloom.
"""

import argparse
import contextlib
import logging
import os
import shutil
import signal
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import Any

UNUSABLE = 2


def parser() -> argparse.ArgumentParser:
    top = argparse.ArgumentParser(description=(__doc__ or "").split("\n", 1)[0])
    top.add_argument("--jobs", type=int, default=4, metavar="N", help="jobs to ask Slurm for (default: 4)")
    top.add_argument("--cores", type=int, default=1, metavar="N", help="workers in each of them (default: 1)")
    top.add_argument("--memory", default="2GiB", metavar="SIZE", help="of each job (default: 2GiB)")
    top.add_argument("--minutes", type=int, default=60, metavar="N", help="time limit of each job (default: 60)")
    top.add_argument("--partition", metavar="NAME")
    top.add_argument("--account", metavar="NAME")
    top.add_argument("--directive", action="append", default=[], metavar="OPTION", help="another option for sbatch")
    top.add_argument("--prologue", action="append", default=[], metavar="LINE", help="shell line before the worker")
    top.add_argument("--interface", metavar="NAME", help="network interface to use (default: Dask chooses)")
    top.add_argument("--shared", default=".", metavar="DIR", help="folder that all nodes see (default: this one)")
    top.add_argument("--scratch", default="/tmp", metavar="DIR", help="folder on each node (default: /tmp)")
    top.add_argument("--wait", default=86400.0, type=float, metavar="SECONDS", help="for a worker (default: a day)")
    top.add_argument("--no-encryption", action="store_true", help="whoever reaches the port can run programs as you")
    top.add_argument("job", metavar="JOB")
    top.add_argument("options", nargs=argparse.REMAINDER, metavar="OPTION OF rateloom run")
    return top


def encrypt(folder: Path) -> None:
    """Make a certificate that signs itself; name it in the configuration of Dask, here and in what starts here."""
    prefix = "DASK_DISTRIBUTED__COMM__"
    os.environ.update({f"{prefix}DEFAULT_SCHEME": "tls", f"{prefix}REQUIRE_ENCRYPTION": "true"})
    if f"{prefix}TLS__CA_FILE" in os.environ:
        return
    key, certificate = str(folder / "key.pem"), str(folder / "certificate.pem")
    request = ["openssl", "req", "-x509", "-newkey", "rsa:3072", "-nodes", "-days", "30", "-subj", "/CN=rateloom"]
    subprocess.run([*request, "-keyout", key, "-out", certificate], check=True, capture_output=True)
    os.environ[f"{prefix}TLS__CA_FILE"] = certificate
    for role in ("SCHEDULER", "WORKER", "CLIENT"):
        os.environ.update({f"{prefix}TLS__{role}__CERT": certificate, f"{prefix}TLS__{role}__KEY": key})


def scheduler(args: argparse.Namespace, logs: Path) -> Any:
    """Start a scheduler in this process, no workers yet."""
    from dask.utils import parse_bytes
    from dask_jobqueue import SLURMCluster  # after encrypt(): the configuration is read once
    from distributed import Security

    logging.getLogger("distributed.scheduler").setLevel(logging.CRITICAL)  # rateloom tells what became of its stages
    options = {"port": 0, "dashboard": False, "dashboard_address": "127.0.0.1:0", "interface": args.interface}
    last = 60 * args.minutes
    memory = parse_bytes(args.memory)
    return SLURMCluster(
        cores=args.cores,
        processes=args.cores,
        memory=f"{memory * 3 // 4}B",  # the rest is for the process that watches the workers
        job_mem=f"{memory // 2**20}M",
        walltime=str(args.minutes),
        queue=args.partition,
        account=args.account,
        job_name="rateloom-worker",
        job_extra_directives=args.directive,
        job_script_prologue=args.prologue,
        # A worker hands back what it has not begun and leaves before Slurm ends it, not all at the same moment.
        worker_extra_args=["--lifetime", f"{0.85 * last:.0f}s", "--lifetime-stagger", f"{0.05 * last:.0f}s"],
        local_directory=args.scratch,
        log_directory=str(logs),
        python=sys.executable,
        interface=args.interface,
        protocol="tcp://" if args.no_encryption else "tls://",
        security=None if args.no_encryption else Security(require_encryption=True),
        scheduler_options=options,
    )


def refusal(cluster: Any) -> str:
    """Give what Slurm has against a job like the ones to come; empty if nothing."""
    trial = subprocess.run(["sbatch", "--test-only"], input=cluster.job_script(), text=True, capture_output=True)
    return trial.stderr.strip() if trial.returncode else ""


def follow(command: list[str]) -> int:
    """Run a program, hand interruptions on to it, and give its exit status."""
    child = subprocess.Popen(command, start_new_session=True)  # else Ctrl-C would reach it twice
    before = {number: signal.signal(number, lambda *_: child.send_signal(signal.SIGINT)) for number in STOPS}
    try:
        status = child.wait()
    finally:
        for number, handler in before.items():
            signal.signal(number, handler)
    return status if status >= 0 else 128 - status


STOPS = (signal.SIGINT, signal.SIGTERM)


def run(args: argparse.Namespace, cluster: Any) -> int:
    """Run the job; should all workers have gone for a while, wait for others and go on."""
    from distributed import Client

    rateloom = str(Path(sys.executable).with_name("rateloom"))
    if why := refusal(cluster):
        print(f"Slurm takes no such job: {why}", file=sys.stderr)
        return UNUSABLE
    cluster.adapt(minimum_jobs=args.jobs, maximum_jobs=args.jobs, interval="5s")
    address = cluster.scheduler_address
    with Client(cluster, set_as_default=False) as client:
        while True:
            try:
                client.wait_for_workers(1, timeout=args.wait)
            except TimeoutError:
                print(f"Slurm has started no worker in {args.wait:g} s.", file=sys.stderr)
                return UNUSABLE
            status = follow([rateloom, "run", args.job, *args.options, "--scheduler", address])
            if status != UNUSABLE or client.nthreads():
                return status
            print("Waiting for workers, then going on.", file=sys.stderr)


def interrupted(*_: object) -> None:
    raise KeyboardInterrupt


def main() -> int:
    args = parser().parse_args()
    shutil.which("sbatch") or sys.exit("sbatch is not on the path: start this where Slurm can be asked")
    for number in STOPS:
        signal.signal(number, interrupted)
    folder = Path(tempfile.mkdtemp(prefix="rateloom-workers-", dir=Path(args.shared).resolve()))  # ours alone: 0700
    status = UNUSABLE
    try:
        if not args.no_encryption:
            encrypt(folder)
        with scheduler(args, folder) as cluster:
            status = run(args, cluster)
    except KeyboardInterrupt:
        status = 130
    finally:
        if status <= 1:
            shutil.rmtree(folder)
        else:
            for secret in ("key.pem", "certificate.pem"):
                with contextlib.suppress(FileNotFoundError):
                    (folder / secret).unlink()
            print(f"What the workers said is in {folder}", file=sys.stderr)
    return status


if __name__ == "__main__":
    sys.exit(main())
