"""A real scheduler and real workers on this machine: work goes out, results come back, deaths are survived."""

import contextlib
import json
import os
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from rateloom import __version__
from rateloom.engine import Evaluation, Status, encode, open_store
from rateloom.engine.workers import Workers
from rateloom.errors import ClusterError

pytest.importorskip("distributed", reason="the extra 'cluster' is not installed")

from rateloom.engine.cluster import Cluster, TlsFiles, run_remotely, versions_of

if TYPE_CHECKING:
    from toy_job import Toy

HERE = Path(__file__).parent
TABLE = "toy_stages:STAGES"


@dataclass
class Site:
    """A cluster: its scheduler, its workers, the folder they run in."""

    folder: Path
    environment: dict[str, str]
    address: str = ""
    options: tuple[str, ...] = ()
    processes: tuple["subprocess.Popen[bytes]", ...] = ()

    def start_scheduler(self) -> None:
        """Start a scheduler and wait for its address."""
        file = self.folder / "scheduler.json"
        arguments = ["--scheduler-file", str(file), "--host", "127.0.0.1", "--port", "0", "--no-dashboard"]
        self._start("scheduler", *arguments)
        deadline = time.monotonic() + 60
        while not file.exists() or not file.read_text(encoding="utf-8").strip().endswith("}"):
            assert time.monotonic() < deadline, (self.folder / "scheduler.log").read_text(encoding="utf-8")
            time.sleep(0.05)
        self.address = json.loads(file.read_text(encoding="utf-8"))["address"]

    def start_worker(self, name: str, *arguments: str, **environment: str) -> "subprocess.Popen[bytes]":
        """Start one worker with its nanny."""
        fixed = ["--nthreads", "1", "--no-dashboard", "--local-directory", str(self.folder), "--name", name]
        return self._start("worker", self.address, *fixed, *arguments, **environment)

    def _start(self, kind: str, *arguments: str, **environment: str) -> "subprocess.Popen[bytes]":
        with (self.folder / f"{kind}.log").open("ab") as log:
            process = subprocess.Popen(
                [sys.executable, "-m", "dask", kind, *arguments, *self.options],
                stdout=log,
                stderr=log,
                cwd=self.folder,
                env=self.environment | environment,
                start_new_session=True,
            )
        self.processes += (process,)
        return process

    def stop(self) -> None:
        """End all that was started."""
        for process in reversed(self.processes):
            with contextlib.suppress(ProcessLookupError):
                os.killpg(process.pid, signal.SIGKILL)  # each began a group of its own
            process.wait()


def new_site(folder: Path) -> Site:
    """Prepare a cluster whose processes can import the toy stages."""
    environment = dict(os.environ, PYTHONPATH=str(HERE), TOY_DIARY=str(folder), PYTHONWARNINGS="ignore")
    environment["DASK_DISTRIBUTED__WORKER__MULTIPROCESSING_METHOD"] = "spawn"
    return Site(folder, environment)


@pytest.fixture(scope="module")
def site(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Site]:
    """A scheduler with two workers, for all tests of this file that do not harm it."""
    site = new_site(tmp_path_factory.mktemp("cluster"))
    try:
        site.start_scheduler()
        site.start_worker("one")
        site.start_worker("two")
        yield site
    finally:
        site.stop()


@pytest.fixture
def own_site(tmp_path: Path) -> Iterator[Site]:
    """A cluster for one test, nothing started yet."""
    folder = tmp_path / "cluster"
    folder.mkdir()
    site = new_site(folder)
    yield site
    site.stop()


@pytest.fixture
def cluster(site: Site) -> Callable[[], Workers]:
    """Connect to the site."""
    return lambda: Cluster(site.address, TABLE)


def test_a_cluster_gives_the_same_bytes_as_this_process(toy: "Toy", cluster: Callable[[], Workers]) -> None:
    toy.chain(20)
    toy.add("bad", ["read 0"], mode="raise")

    remote = toy.run(cluster())
    toy.output = toy.folder / "here"
    here = toy.run()

    assert remote.digests == here.digests
    assert [fault.node for fault in remote.faults] == ["bad"]
    assert "no such luck" in remote.faults[0].detail


def test_a_worker_killed_mid_stage_is_survived(toy: "Toy", cluster: Callable[[], Workers], site: Site) -> None:
    toy.chain(8)
    toy.add("fragile", ["read 0"], mode="die once")

    evaluation = toy.run(cluster())

    assert (site.folder / "died").exists()
    assert evaluation.faults == []
    assert set(evaluation.status.values()) == {Status.COMPUTED}


def test_a_stage_that_kills_workers_twice_is_named(toy: "Toy", cluster: Callable[[], Workers], site: Site) -> None:
    toy.chain(6)
    toy.add("killer", ["read 0"], mode="die")
    toy.add("after", ["killer"])
    (site.folder / "diary.txt").unlink(missing_ok=True)

    evaluation = toy.run(cluster())

    assert [fault.node for fault in evaluation.faults] == ["killer"]
    assert "2 workers died over it" in evaluation.faults[0].detail
    deaths = [line for line in (site.folder / "diary.txt").read_text(encoding="utf-8").split("\n") if "died" in line]
    assert len(deaths) == 2
    assert {n for n, s in evaluation.status.items() if s is not Status.COMPUTED} == {"killer"}


def test_a_stage_that_takes_too_long_in_a_thread_is_stopped(toy: "Toy", cluster: Callable[[], Workers]) -> None:
    toy.chain(2)
    toy.read("slow", toy.folder / "0.txt", mode="hang")

    evaluation = toy.run(cluster(), seconds_per_file=0.5)

    assert toy.value(evaluation, "slow") is None
    assert evaluation.faults == []


def test_an_interrupted_run_keeps_what_came_back_and_frees_the_cluster(
    toy: "Toy", cluster: Callable[[], Workers], computed: Callable[[Evaluation], list[str]]
) -> None:
    toy.chain(8)

    def interrupt(_: str) -> None:
        raise KeyboardInterrupt

    with pytest.raises(KeyboardInterrupt):
        toy.run(cluster(), progress=interrupt)
    with open_store(toy.output) as store:
        assert store.past()

    assert 0 < len(computed(toy.run(cluster()))) < 16


@pytest.mark.long
def test_files_travel_to_workers_that_cannot_see_them(toy: "Toy", tmp_path: Path) -> None:
    if subprocess.run(["unshare", "--mount", "true"], capture_output=True, check=False).returncode:
        pytest.skip("a worker cannot be given its own view of the file system here")
    toy.chain(5)
    away = new_site(tmp_path / "away")
    away.folder.mkdir()
    away.start_scheduler()
    hide = f"mount -t tmpfs none {toy.folder} && exec {sys.executable} -m dask worker {away.address} --nthreads 1"
    with (away.folder / "worker.log").open("ab") as log:
        process = subprocess.Popen(
            ["unshare", "--mount", "sh", "-c", f"{hide} --no-dashboard --local-directory {away.folder}"],
            env=away.environment,
            stdout=log,
            stderr=log,
            cwd=away.folder,
            start_new_session=True,
        )
    away.processes += (process,)
    try:
        remote = toy.run(Cluster(away.address, TABLE))
    finally:
        away.stop()

    assert remote.faults == []
    toy.output = toy.folder / "here"
    assert remote.digests == toy.run().digests


@pytest.mark.long
def test_a_worker_of_another_version_stops_the_run(toy: "Toy", own_site: Site) -> None:
    (own_site.folder / "sitecustomize.py").write_text(
        "import rateloom\nrateloom.__version__ = '99.0'\n", encoding="utf-8"
    )
    own_site.start_scheduler()
    own_site.start_worker("old", PYTHONPATH=f"{own_site.folder}{os.pathsep}{HERE}")
    toy.chain(2)

    with pytest.raises(ClusterError, match=r"a worker on .* runs rateloom 99.0, this is rateloom .*Install the same"):
        toy.run(Cluster(own_site.address, TABLE))


@pytest.mark.usefixtures("toys")
def test_other_stages_of_the_same_version_are_refused() -> None:
    assert run_remotely(TABLE, __version__, versions_of(TABLE), encode([])) == []
    with pytest.raises(ClusterError, match="with other stages"):
        run_remotely(TABLE, __version__, b"another", b"not looked at")


@pytest.mark.parametrize("address", ["tcp://127.0.0.1:9", "nonsense", "tcp://no.such.host.invalid:8786", "ftp://x:1"])
def test_a_scheduler_that_is_not_there_is_told(address: str, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("rateloom.engine.cluster.CONNECT_SECONDS", 1.0)

    with pytest.raises(ClusterError, match=r"the Dask scheduler .* cannot be reached: .*Check that it runs"):
        Cluster(address, TABLE)


def test_a_missing_package_is_told(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "distributed", None)

    with pytest.raises(ClusterError, match=r"pip install 'rateloom\[cluster\]'"):
        Cluster("tcp://127.0.0.1:9", TABLE)


def test_a_scheduler_without_workers_is_told(own_site: Site) -> None:
    own_site.start_scheduler()

    with pytest.raises(ClusterError, match=r"has had no worker for 0\.5 s\. Start one with: dask worker tcp://"):
        Cluster(own_site.address, TABLE, patience=0.5)


@pytest.mark.long
def test_a_scheduler_that_dies_under_way_is_told_and_the_rest_is_kept(toy: "Toy", own_site: Site) -> None:
    own_site.start_scheduler()
    own_site.start_worker("one")
    for i in range(30):
        toy.write(f"{i}.txt", f"{i}")
        toy.read(f"read {i}", toy.folder / f"{i}.txt", mode="sleep")
    seen: list[str] = []

    def kill_scheduler(name: str) -> None:
        seen.append(name)
        if len(seen) == 3:
            own_site.processes[0].kill()

    with pytest.raises(ClusterError, match=r"has gone\. All that was finished is kept"):
        toy.run(Cluster(own_site.address, TABLE), progress=kill_scheduler)

    with open_store(toy.output) as store:
        assert len(store.past()) >= 3


@pytest.mark.long
def test_workers_that_all_leave_for_good_are_told(toy: "Toy", own_site: Site) -> None:
    own_site.start_scheduler()
    worker = own_site.start_worker("one")
    for i in range(30):
        toy.write(f"{i}.txt", f"{i}")
        toy.read(f"read {i}", toy.folder / f"{i}.txt", mode="sleep")
    crew = Cluster(own_site.address, TABLE)
    crew._patience = 1.0  # the first worker may take longer to start

    with pytest.raises(ClusterError, match="has had no worker for 1 s"):
        toy.run(crew, progress=lambda _: worker.terminate())


@pytest.mark.long
def test_encrypted_addresses_work(toy: "Toy", own_site: Site) -> None:
    files = certificates(own_site.folder)
    own_site.options = (
        *("--tls-ca-file", files.authority),
        *("--tls-cert", files.certificate),
        *("--tls-key", files.key),
        *("--protocol", "tls"),
    )
    own_site.start_scheduler()
    own_site.start_worker("one")
    assert own_site.address.startswith("tls://")
    toy.chain(3)

    remote = toy.run(Cluster(own_site.address, TABLE, tls=files))

    toy.output = toy.folder / "here"
    assert remote.digests == toy.run().digests
    with pytest.raises(ClusterError, match="tls:// needs its certificates"):
        Cluster(own_site.address, TABLE)


def certificates(folder: Path) -> TlsFiles:
    """Make a key and a certificate signed by itself."""
    key, certificate = folder / "key.pem", folder / "certificate.pem"
    command = ["openssl", "req", "-x509", "-newkey", "rsa:2048", "-nodes", "-days", "2", "-subj", "/CN=test"]
    try:
        subprocess.run([*command, "-keyout", str(key), "-out", str(certificate)], check=True, capture_output=True)
    except FileNotFoundError:
        pytest.skip("openssl is not installed")
    return TlsFiles(str(certificate), str(certificate), str(key))


@pytest.mark.long
def test_many_tasks_survive_workers_that_come_and_go(toy: "Toy", own_site: Site) -> None:
    own_site.start_scheduler()
    workers = [own_site.start_worker(f"w{i}") for i in range(2)]
    for i in range(120):
        toy.write(f"{i}.txt", f"{i}")
        toy.read(f"read {i}", toy.folder / f"{i}.txt", mode="sleep")
    toy.add("total", [f"read {i}" for i in range(120)])
    seen: list[str] = []

    def change_shift(name: str) -> None:
        seen.append(name)
        if len(seen) % 30 == 0:
            os.killpg(workers.pop(0).pid, signal.SIGKILL)
            workers.append(own_site.start_worker(f"w{len(seen)}"))

    evaluation = toy.run(Cluster(own_site.address, TABLE), progress=change_shift)

    assert toy.value(evaluation, "total") == [sum(range(120))]
