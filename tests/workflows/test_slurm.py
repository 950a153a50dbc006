"""The scripts for Slurm, run by a Slurm of our own on this machine: one node, its own keys, its own ports."""

import gzip
import json
import os
import shutil
import socket
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from contextlib import ExitStack
from dataclasses import dataclass
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
SCRIPTS = ROOT / "workflows" / "slurm"
PROGRAMS = ("munged", "slurmctld", "slurmd", "sbatch", "srun", "scancel", "openssl")

pytestmark = [pytest.mark.long, pytest.mark.timeout(1200)]

JOB = """\
title: Hydrogen
calculations: calculations
temperatures: {from: 500 K, to: 2000 K, count: 8, spacing: reciprocal}
species:
  H: {energy: h_ccsdt.out.gz}
  H2: {frequencies: h2.out.gz, energy: h2_ccsdt.out.gz}
  O: {energy: o_ccsdt.out.gz}
  OH: {frequencies: oh.out.gz, energy: oh_ccsdt.out.gz}
transition_states:
  ts-h2-h: {frequencies: ts_h2_h.out.gz, energy: ts_h2_h_ccsdt.out.gz}
  ts-h2-o: {frequencies: ts_h2_o.out.gz, energy: ts_h2_o_ccsdt.out.gz}
  no-saddle: {frequencies: h2o.out.gz, energy: h2o_ccsdt.out.gz}
reactions:
  h2-h: {equation: H + H2 <=> H2 + H, transition_state: ts-h2-h}
  h2-o: {equation: H2 + O <=> OH + H, transition_state: ts-h2-o}
  minimum: {equation: H2 + O <=> OH + H, transition_state: no-saddle}
"""
WITHHELD = 1
"""Exit status of that job: a minimum is no transition state."""

CONFIGURATION = """\
ClusterName=test
SlurmctldHost={host}(127.0.0.1)
SlurmUser=root
AuthType=auth/munge
AuthInfo=socket={folder}/munge.socket
SlurmctldPort={ports[0]}
SlurmdPort={ports[1]}
StateSaveLocation={folder}/state
SlurmdSpoolDir={folder}/spool
SlurmctldPidFile={folder}/slurmctld.pid
SlurmdPidFile={folder}/slurmd.pid
SlurmdParameters=config_overrides
ProctrackType=proctrack/linuxproc
TaskPlugin=task/none
SelectType=select/cons_tres
SelectTypeParameters=CR_Core
SwitchType=switch/none
MpiDefault=none
MailProg=/bin/true
ReturnToService=2
KillWait=5
NodeName={host} NodeAddr=127.0.0.1 CPUs=4 RealMemory=8000 State=UNKNOWN
PartitionName=main Nodes=ALL Default=YES MaxTime=INFINITE State=UP
"""


def start(stack: ExitStack, log: Path, *command: str, **environment: str) -> "subprocess.Popen[bytes]":
    """Start a daemon in the foreground of its own; it is ended with the stack."""
    with log.open("wb") as file:
        process = subprocess.Popen(command, stdout=file, stderr=file, env=os.environ | environment)

    def end() -> None:
        process.terminate()
        try:
            process.wait(timeout=30)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()

    stack.callback(end)
    return process


def until(holds: Callable[[], bool], seconds: float) -> bool:
    deadline = time.monotonic() + seconds
    while not holds():
        if time.monotonic() > deadline:
            return False
        time.sleep(0.2)
    return True


def free_ports(count: int) -> list[int]:
    with ExitStack() as stack:
        sockets = [stack.enter_context(socket.create_server(("127.0.0.1", 0))) for _ in range(count)]
        return [open_socket.getsockname()[1] for open_socket in sockets]


@pytest.fixture(scope="module")
def slurm(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """A Slurm of one node; gives the name of its configuration."""
    if missing := [name for name in PROGRAMS if shutil.which(name) is None]:
        pytest.skip(f"not installed: {', '.join(missing)} (Debian: slurm-wlm, munge, openssl)")
    if os.geteuid() != 0:
        pytest.skip("slurmd has to be started by root")
    folder = tmp_path_factory.mktemp("slurm")
    host = socket.gethostname().split(".")[0]
    configuration = folder / "slurm.conf"
    configuration.write_text(CONFIGURATION.format(host=host, folder=folder, ports=free_ports(2)))
    key = folder / "munge.key"
    key.write_bytes(os.urandom(1024))
    key.chmod(0o600)
    with ExitStack() as stack:
        own = {
            "key": key,
            "socket": folder / "munge.socket",
            "pid": folder / "munge.pid",
            "seed": folder / "munge.seed",
        }
        start(
            stack,
            folder / "munged.log",
            *("munged", "--foreground", "--force", f"--key-file={own['key']}", f"--socket={own['socket']}"),
            *(f"--pid-file={own['pid']}", f"--seed-file={own['seed']}"),
        )
        if not until(own["socket"].exists, 30):
            pytest.skip(f"munged does not start: {(folder / 'munged.log').read_text()}")
        for name, *options in (("slurmctld", "-D"), ("slurmd", "-D", "-N", host)):
            start(stack, folder / f"{name}.log", name, *options, "-f", str(configuration))

        def asked(*command: str) -> str:
            environment = os.environ | {"SLURM_CONF": str(configuration)}
            return subprocess.run(
                command, env=environment, capture_output=True, text=True, check=False
            ).stdout.strip()

        if not until(lambda: asked("sinfo", "--noheader", "--format=%T") == "idle", 60):
            logs = "\n".join((folder / f"{name}.log").read_text()[-1000:] for name in ("slurmctld", "slurmd"))
            pytest.skip(f"Slurm does not start: {logs}")
        yield str(configuration)
        asked("scancel", "--user=root")
        until(lambda: not asked("squeue", "--noheader"), 30)


@dataclass(frozen=True)
class Desk:
    """A folder that a job is submitted from."""

    folder: Path
    environment: dict[str, str]

    def call(self, *command: str) -> "subprocess.CompletedProcess[str]":
        return subprocess.run(
            command, cwd=self.folder, env=self.environment, capture_output=True, text=True, check=False, timeout=300
        )

    def here(self, output: str) -> int:
        """Run the job without a cluster."""
        rateloom = str(Path(sys.executable).with_name("rateloom"))
        done = self.call(rateloom, "run", "job.yaml", "--workers", "1", "--output", output)
        assert done.returncode <= 1, done.stderr
        return done.returncode

    def make_longer(self) -> None:
        """Give the job more reactions, each with a file of its own, so that there is time to disturb it."""
        lines = JOB.replace("reactions:\n", "@").split("@")
        output = gzip.decompress((self.folder / "calculations" / "ts_h2_o.out.gz").read_bytes())
        for i in range(60):
            (self.folder / "calculations" / f"ts_{i}.out.gz").write_bytes(gzip.compress(output, mtime=i))
            lines[0] += f"  ts-{i}: {{frequencies: ts_{i}.out.gz, energy: ts_h2_o_ccsdt.out.gz}}\n"
            lines[1] += f"  again-{i}: {{equation: H2 + O <=> OH + H, transition_state: ts-{i}}}\n"
        (self.folder / "job.yaml").write_text("reactions:\n".join(lines))

    def submit(self, tasks: int) -> str:
        """Hand in the batch script; gives the number of its job."""
        options = ["--parsable", f"--ntasks={tasks}", "--mem-per-cpu=1G", "--time=10", "--output=log.txt"]
        done = self.call("sbatch", *options, str(SCRIPTS / "in-allocation.sh"), "job.yaml", "--output", "there")
        assert done.returncode == 0, done.stderr
        return done.stdout.strip()

    def queued(self) -> str:
        """Give the numbers of the jobs that Slurm has not ended."""
        return self.call("squeue", "--noheader", "--format=%i").stdout.strip()

    def exit_code(self, number: str) -> str:
        """Wait for the end of a job; gives its exit code as Slurm writes it."""
        assert until(lambda: not self.queued(), 240), self.log()
        return self.call("scontrol", "show", "job", number).stdout.partition("ExitCode=")[2].split()[0]

    def log(self) -> str:
        file = self.folder / "log.txt"
        return file.read_text() if file.exists() else ""

    def tables(self, output: str) -> dict[str, bytes]:
        return {file.name: file.read_bytes() for file in (self.folder / output).glob("*.csv")}


@pytest.fixture
def desk(slurm: str, tmp_path: Path, calculations: Path) -> Desk:
    """A small job beside copies of its calculations."""
    (tmp_path / "calculations").mkdir()
    for stem in ("h", "h2", "o", "oh", "h2o", "ts_h2_h", "ts_h2_o"):
        for file in calculations.glob(f"{stem}[._]*gz"):
            if file.name in {f"{stem}.out.gz", f"{stem}_ccsdt.out.gz"}:
                shutil.copy(file, tmp_path / "calculations")
    (tmp_path / "job.yaml").write_text(JOB)
    environment = {name: value for name, value in os.environ.items() if not name.startswith(("SLURM", "DASK"))}
    return Desk(tmp_path, environment | {"SLURM_CONF": slurm, "PYTHON": sys.executable})


def test_a_job_in_an_allocation_gives_the_tables_of_a_local_run(desk: Desk) -> None:
    code = desk.exit_code(desk.submit(tasks=2))

    assert code == "1:0", desk.log()
    assert desk.here("here") == WITHHELD
    assert desk.tables("there") == desk.tables("here")
    assert len(desk.tables("there")) >= 6
    assert not list(desk.folder.glob("rateloom-slurm-*")), "the folder of addresses and keys stays behind"


def test_workers_requested_from_slurm_give_the_tables_of_a_local_run(desk: Desk) -> None:
    script = str(SCRIPTS / "request_workers.py")
    options = ["--jobs", "2", "--memory", "1GiB", "--minutes", "10", "--wait", "120"]

    done = desk.call(sys.executable, script, *options, "job.yaml", "--output", "there")

    assert done.returncode == WITHHELD == desk.here("here"), done.stderr
    assert desk.tables("there") == desk.tables("here")
    assert len(desk.tables("there")) >= 6
    assert not list(desk.folder.glob("rateloom-workers-*")), "the folder of logs and keys stays behind"
    assert until(lambda: not desk.queued(), 30), "the workers stay behind"


def test_an_allocation_that_cannot_be_had_is_told_at_once(desk: Desk) -> None:
    done = desk.call(
        sys.executable, str(SCRIPTS / "request_workers.py"), "--partition", "nowhere", "job.yaml", "--output", "there"
    )

    assert done.returncode == 2
    assert "Slurm takes no such job: " in done.stderr
    assert "invalid partition" in done.stderr


def test_an_allocation_whose_time_is_up_keeps_what_was_finished(desk: Desk) -> None:
    desk.make_longer()
    number = desk.submit(tasks=1)
    assert until(lambda: "stages done" in desk.log(), 300), desk.log()

    desk.call("scancel", "--signal=INT", "--batch", number)  # what Slurm sends a minute before the time is up

    assert desk.exit_code(number) == "130:0"
    assert "what was finished is kept" in desk.log()
    assert not desk.tables("there")
    assert list(desk.folder.glob("rateloom-slurm-*/*.log"))
    assert not list(desk.folder.glob("rateloom-slurm-*/*.pem"))
    assert desk.here("there") == WITHHELD == desk.here("here")
    assert json.loads((desk.folder / "there" / "run.json").read_text())["stages"]["read"]["reused"] > 0
    names = ["rates.csv", "arrhenius.csv", "audit.csv"]
    assert [desk.tables("there")[name] for name in names] == [desk.tables("here")[name] for name in names]


def test_a_worker_that_slurm_takes_away_is_replaced(desk: Desk) -> None:
    desk.make_longer()
    script = str(SCRIPTS / "request_workers.py")
    command = [sys.executable, script, "--jobs", "1", "--memory", "1GiB", "job.yaml", "--output", "there"]
    with (desk.folder / "log.txt").open("w") as log:
        running = subprocess.Popen(command, cwd=desk.folder, env=desk.environment, stdout=log, stderr=log)
    try:
        assert until(lambda: "stages done" in desk.log(), 300), desk.log()
        first = desk.queued()
        desk.call("scancel", first)

        assert until(lambda: desk.queued() not in {"", first}, 120), desk.log()
        assert running.wait(timeout=400) == WITHHELD, desk.log()
    finally:
        running.terminate()
        running.wait()
    assert desk.here("here") == WITHHELD
    assert desk.tables("there")["rates.csv"] == desk.tables("here")["rates.csv"]
