"""What may befall a whole run, seen from the command line; each section of WHAT-HAPPENS-WHEN.md has its test here."""

import contextlib
import gzip
import io
import json
import os
import random
import re
import shutil
import signal
import sqlite3
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from rateloom.calculation.output import LARGEST
from rateloom.cli import main
from rateloom.cli.options import LARGEST_FILE_MB, SECONDS_PER_FILE
from rateloom.engine.files import LARGEST_FILE

PAGE = Path(__file__).resolve().parents[2] / "workflows" / "WHAT-HAPPENS-WHEN.md"
TABLES = ("rates.csv", "arrhenius.csv", "species.csv", "equilibrium.csv", "audit.csv")
STORE, LOCK = ".store.sqlite", ".store.lock"
PATIENCE = 300.0
"""For one command on a busy machine [s]; a run of the small job takes about two."""
YEAR = 365 * 86_400 * 1_000_000_000
"""[ns]"""


# A batch and what is done to it


@dataclass(frozen=True)
class Ended:
    """A command that has ended."""

    status: int
    out: str
    err: str

    @property
    def messages(self) -> list[str]:
        """Lines on stderr without those of progress."""
        return [line for line in self.err.splitlines() if not re.match(r"\d+ of \d+ stages done", line)]


class Batch:
    """The small job in a folder of its own."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.job = folder / "job.yaml"
        self.output = folder / "tables"

    def copy(self, folder: Path) -> "Batch":
        """Copy the whole folder."""
        shutil.copytree(self.folder, folder)
        return Batch(folder)

    def file(self, name: str) -> Path:
        """Path of a calculation."""
        return self.folder / "calculations" / name

    def edit_job(self, old: str, new: str) -> None:
        """Change the job file."""
        text = self.job.read_text()
        assert old in text
        self.job.write_text(text.replace(old, new))

    def change(self) -> None:
        """Ask for other temperatures: every table gets other rows."""
        self.edit_job("to: 2000 K", "to: 1500 K")

    def tables(self, folder: Path | None = None) -> dict[str, bytes]:
        """Content of the tables."""
        return {name: ((folder or self.output) / name).read_bytes() for name in TABLES}

    def leftovers(self) -> list[str]:
        """Files in the output folder that should not be there."""
        meant = {*TABLES, "changes.csv", "run.json", STORE, LOCK}
        return sorted(path.name for path in self.output.iterdir() if path.name not in meant)

    def reused(self, stage: str) -> int:
        """How many results of a stage the last run took from earlier ones."""
        return int(json.loads((self.output / "run.json").read_text())["stages"][stage]["reused"])

    def start(self, *options: str, program: tuple[str, ...] = ("-m", "rateloom"), **more: Any) -> "subprocess.Popen":
        """Start a run in a process group of its own."""
        command = [sys.executable, *program, "run", str(self.job), *options]
        return subprocess.Popen(
            command,
            stdout=subprocess.PIPE,
            stderr=subprocess.PIPE,
            text=True,
            start_new_session=True,
            # A shell may have started the tests with interrupts ignored, which a child would inherit.
            preexec_fn=lambda: signal.signal(signal.SIGINT, signal.SIG_DFL),
            **more,
        )


def run(job: Path, *options: str) -> Ended:
    """Run a job by the command line, in this process unless several workers are asked for."""
    workers = () if "--workers" in options else ("--workers", "1")
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = main(["run", str(job), *workers, *options])
    return Ended(status, out.getvalue(), err.getvalue())


def end_of(process: "subprocess.Popen") -> Ended:
    """Wait for a run."""
    out, err = process.communicate(timeout=PATIENCE)
    return Ended(process.returncode, out, err)


def wait_for(condition: Callable[[], bool]) -> None:
    """Wait until something is so."""
    end = time.monotonic() + PATIENCE
    while not condition():
        assert time.monotonic() < end, "it did not come to pass"
        time.sleep(0.005)


def is_refused(ended: Ended, *words: str) -> None:
    """Assert that a run ended with one message that says these words, and no traceback."""
    assert ended.status == 2, ended
    assert ended.out == ""
    assert len(ended.messages) == 1, ended.messages
    for word in words:
        assert word in ended.messages[0]


@pytest.fixture(scope="module")
def finished(tmp_path_factory: pytest.TempPathFactory, lay_out: Callable[[Path], Path]) -> Batch:
    """The small job, run once; tests take copies."""
    batch = Batch(lay_out(tmp_path_factory.mktemp("finished")).parent)
    assert run(batch.job).status == 0
    return batch


@pytest.fixture
def batch(finished: Batch, tmp_path: Path) -> Batch:
    """A copy of the finished job."""
    return finished.copy(tmp_path / "batch")


@pytest.fixture(scope="module")
def changed(finished: Batch, tmp_path_factory: pytest.TempPathFactory) -> dict[str, bytes]:
    """Tables of the finished job after ``change``, when nothing disturbs the run."""
    batch = finished.copy(tmp_path_factory.mktemp("changed") / "batch")
    batch.change()
    assert run(batch.job).status == 0
    return batch.tables()


@pytest.fixture(scope="module")
def recalculated(finished: Batch, tmp_path_factory: pytest.TempPathFactory) -> dict[str, bytes]:
    """Tables of the finished job after ``shift_energy`` of methane, when nothing disturbs the run."""
    batch = finished.copy(tmp_path_factory.mktemp("recalculated") / "batch")
    shift_energy(batch.file("ch4_ccsdt.out.gz"))
    assert run(batch.job).status == 0
    assert batch.tables() != finished.tables()
    return batch.tables()


@pytest.fixture
def meanwhile(monkeypatch: pytest.MonkeyPatch) -> Callable[[Callable[[int, str], None]], None]:
    """Do something after each stage of runs in this process: called with its number and name."""

    def arrange(act: Callable[[int, str], None]) -> None:
        @contextlib.contextmanager
        def progress() -> Iterator[Callable[[int, int, str], None]]:
            yield lambda done, _total, last: act(done, last)

        monkeypatch.setattr("rateloom.cli.run.progress", progress)

    return arrange


def shift_energy(path: Path, *, compress: bool = True) -> None:
    """Change the last digit but three of a coupled-cluster energy, as a recalculation might; the size stays."""
    data = path.read_bytes()
    text = (gzip.decompress(data) if data.startswith(b"\x1f\x8b") else data).decode()
    found = re.findall(r"CCSD\(T\) total energy[^\n]*", text)[-1]
    place = text.rindex(found) + len(found.rstrip()) - 6
    text = text[:place] + str((int(text[place]) + 5) % 10) + text[place + 1 :]
    path.write_bytes(gzip.compress(text.encode()) if compress else text.encode())


# Killed


@pytest.fixture(scope="module")
def under_way(finished: Batch, tmp_path_factory: pytest.TempPathFactory) -> tuple[Batch, dict[str, bytes], float]:
    """The finished job after a change, what an undisturbed run makes of it, and how long that takes [s]."""
    batch = finished.copy(tmp_path_factory.mktemp("under way") / "batch")
    batch.change()
    new = batch.copy(batch.folder.parent / "whole")
    (new.output / STORE).unlink()
    begun = time.monotonic()
    assert end_of(new.start("--workers", "2")).status == 0
    return batch, new.tables(), time.monotonic() - begun


def kill_at_random(seed: int, under_way: tuple[Batch, dict[str, bytes], float], folder: Path) -> None:
    """Kill a run and its workers at a moment of its life and look at what it leaves."""
    unchanged, new, duration = under_way
    chance = random.Random(seed)
    batch = unchanged.copy(folder)
    old = batch.tables()
    if chance.random() < 0.7:
        (batch.output / STORE).unlink()
    process = batch.start("--workers", str(1 + seed % 2))
    with contextlib.suppress(subprocess.TimeoutExpired):
        process.wait(chance.uniform(0.1, 1.1) * duration)
    with contextlib.suppress(ProcessLookupError):
        os.killpg(process.pid, signal.SIGKILL)
    process.communicate(timeout=PATIENCE)

    assert_whole(batch, old, new, folder.parent / "copy")
    ended = run(batch.job)

    assert (ended.status, ended.messages) == (0, [])
    assert batch.tables() == new
    assert batch.leftovers() == []
    shutil.rmtree(folder)


def assert_whole(batch: Batch, old: dict[str, bytes], new: dict[str, bytes], scratch: Path) -> None:
    """Assert that a killed run left each table old or new, and a sound store (looked at in a copy)."""
    for name, data in batch.tables().items():
        assert data in (old[name], new[name]), name
    copy = batch.copy(scratch)
    if (copy.output / STORE).exists():
        with contextlib.closing(sqlite3.connect(copy.output / STORE)) as store:
            assert store.execute("PRAGMA integrity_check").fetchall() == [("ok",)]
    shutil.rmtree(scratch)


@pytest.mark.parametrize("seed", range(4))
def test_a_killed_run_is_gone_on_with(
    seed: int, under_way: tuple[Batch, dict[str, bytes], float], tmp_path: Path
) -> None:
    kill_at_random(seed, under_way, tmp_path / "batch")


@pytest.mark.long
@pytest.mark.parametrize("seed", range(4, 50))
def test_a_run_killed_at_any_moment_is_gone_on_with(
    seed: int, under_way: tuple[Batch, dict[str, bytes], float], tmp_path: Path
) -> None:
    kill_at_random(seed, under_way, tmp_path / "batch")


DIES_AT_A_RENAME = """
import os, signal, sys
from pathlib import Path
from rateloom.cli import main
left, rename = int(sys.argv.pop(1)), Path.replace
def replace(path, target):
    global left
    left -= 1
    if left < 0:
        os.kill(os.getpid(), signal.SIGKILL)
    return rename(path, target)
Path.replace = replace
sys.exit(main([*sys.argv[1:], "--workers", "1"]))
"""


@pytest.mark.parametrize("renames", [2, *(pytest.param(n, marks=pytest.mark.long) for n in (0, 1, 3, 4, 5, 6))])
def test_a_run_killed_among_its_last_writes_leaves_whole_tables(
    batch: Batch, changed: dict[str, bytes], tmp_path: Path, renames: int
) -> None:
    batch.change()
    old = batch.tables()
    process = batch.start(program=("-c", DIES_AT_A_RENAME, str(renames)))

    assert end_of(process).status == -signal.SIGKILL
    assert batch.leftovers()
    assert_whole(batch, old, changed, tmp_path / "copy")
    assert run(batch.job).status == 0

    assert batch.tables() == changed
    assert batch.leftovers() == []


def test_an_interrupted_run_keeps_all_that_was_finished(batch: Batch, changed: dict[str, bytes]) -> None:
    batch.change()
    old = batch.tables()
    (batch.output / STORE).unlink()
    journal = batch.output / f"{STORE}-wal"
    process = batch.start("--workers", "2")
    # The journal grows with each result; what makes an empty store takes fewer pages of 4 kB.
    wait_for(lambda: process.poll() is not None or (journal.exists() and journal.stat().st_size > 60_000))
    os.killpg(process.pid, signal.SIGINT)
    ended = end_of(process)

    assert ended.status == 130
    assert ended.out == ""
    assert ended.messages == ["Interrupted; what was finished is kept, run again to go on."]
    assert batch.tables() == old
    assert run(batch.job).status == 0
    assert batch.reused("read") > 0
    assert batch.tables() == changed


@pytest.mark.long
@pytest.mark.parametrize("seed", range(10))
def test_an_interrupt_at_any_moment_is_one_message(
    seed: int, under_way: tuple[Batch, dict[str, bytes], float], tmp_path: Path
) -> None:
    unchanged, new, duration = under_way
    batch = unchanged.copy(tmp_path / "batch")
    (batch.output / STORE).unlink()
    process = batch.start("--workers", "2")
    # From when the run holds the folder: before, it is Python itself that is interrupted.
    wait_for(lambda: str(process.pid) in (batch.output / LOCK).read_text())
    with contextlib.suppress(subprocess.TimeoutExpired):
        process.wait(random.Random(seed).uniform(0.0, 0.9) * duration)
    with contextlib.suppress(ProcessLookupError):
        os.killpg(process.pid, signal.SIGINT)
    ended = end_of(process)

    if ended.status != 0:  # it may have been quicker
        assert ended.status == 130
        assert ended.messages == ["Interrupted; what was finished is kept, run again to go on."]
    assert run(batch.job).status == 0
    assert batch.tables() == new
    assert batch.leftovers() == []


# The disk


@contextlib.contextmanager
def mounted(folder: Path, size: int) -> Iterator[Path]:
    """A small file system; skips where none can be mounted."""
    folder.mkdir()
    command = ["mount", "-t", "tmpfs", "-o", f"size={size}", "rateloom-test", str(folder)]
    try:
        done = subprocess.run(command, capture_output=True, check=False).returncode == 0
    except OSError:
        done = False
    if not done:
        pytest.skip("a small file system cannot be mounted here")
    try:
        yield folder
    finally:
        subprocess.run(["umount", "-l", str(folder)], check=True)


def fill(folder: Path, leave: int) -> Path:
    """Fill a file system but for some bytes."""
    filler = folder / "filler"
    free = os.statvfs(folder)
    filler.write_bytes(bytes(max(free.f_bavail * free.f_frsize - leave, 0)))
    return filler


@pytest.mark.parametrize("leave", [0, 4_096, 16_384, 65_536, 131_072])
def test_a_full_disk_leaves_the_tables_and_the_next_run_finishes(
    batch: Batch, changed: dict[str, bytes], tmp_path: Path, leave: int
) -> None:
    batch.change()
    old = batch.tables()
    with mounted(tmp_path / "small", 800_000) as small:
        shutil.copytree(batch.output, small / "tables")
        filler = fill(small, leave)

        ended = run(batch.job, "--output", str(small / "tables"))

        is_refused(ended, str(small / "tables"))
        assert batch.tables(small / "tables") == old
        filler.unlink()
        assert run(batch.job, "--output", str(small / "tables")).status == 0
        assert batch.tables(small / "tables") == changed


def test_a_folder_that_cannot_be_written_is_told_before_anything_is_computed(batch: Batch, tmp_path: Path) -> None:
    batch.change()
    old = batch.tables()
    with mounted(tmp_path / "small", 800_000) as small:
        shutil.copytree(batch.output, small / "tables")
        subprocess.run(["mount", "-o", "remount,ro", str(small)], check=True)

        ended = run(batch.job, "--output", str(small / "tables"))

        is_refused(ended, str(small / "tables"), "Read-only file system", "--output")
        assert batch.tables(small / "tables") == old


@pytest.mark.parametrize("when", [1, 5, "last"])
def test_an_output_folder_removed_under_way_is_told(
    batch: Batch,
    changed: dict[str, bytes],
    meanwhile: Callable[[Callable[[int, str], None]], None],
    when: int | str,
) -> None:
    batch.change()

    def remove(done: int, last: str) -> None:
        if done == when or (when == "last" and last == "rows of reaction ch4-h"):
            shutil.rmtree(batch.output)

    meanwhile(remove)
    ended = run(batch.job)

    is_refused(ended, str(batch.output), "removed", "Run again")
    meanwhile(lambda _done, _last: None)
    assert run(batch.job).status == 0
    assert batch.tables() == changed


# The store


def test_a_store_of_a_newer_version_is_left_alone(batch: Batch) -> None:
    batch.change()
    old = batch.tables()
    with contextlib.closing(sqlite3.connect(batch.output / STORE)) as store:
        newer = store.execute("PRAGMA user_version").fetchone()[0] + 1
        mark = store.execute("PRAGMA application_id").fetchone()[0] + 1
        store.execute(f"PRAGMA user_version = {newer}")
        store.execute(f"PRAGMA application_id = {mark}")
    before = (batch.output / STORE).read_bytes()

    is_refused(run(batch.job), STORE, "newer version", "--output")

    assert (batch.output / STORE).read_bytes() == before
    assert batch.tables() == old


def damage(path: Path, chance: random.Random) -> None:
    """Flip some bytes of a file, or write nonsense over a whole page of it."""
    data = bytearray(path.read_bytes())
    if chance.random() < 0.3:
        page = chance.randrange(0, len(data) // 4096)
        data[page * 4096 : (page + 1) * 4096] = chance.randbytes(4096)
    for _ in range(chance.choice((1, 3, 30))):
        data[chance.randrange(len(data))] ^= 1 << chance.randrange(8)
    path.write_bytes(data)


def damage_stores(finished: Batch, folder: Path, seeds: range) -> None:
    """Damage a store in many ways; the tables must come out as they were, what is withheld withheld."""
    batch = finished.copy(folder)
    batch.edit_job("CH4: {", "CH4: {multiplicity: 3, ")
    assert run(batch.job).status == 1
    right, sound = batch.tables(), (batch.output / STORE).read_bytes()
    assert b"multiplicity" in right["audit.csv"]
    assert b"ch4-h" not in right["rates.csv"]
    for seed in seeds:
        shutil.rmtree(batch.output)
        batch.output.mkdir()
        (batch.output / STORE).write_bytes(sound)
        damage(batch.output / STORE, random.Random(seed))

        ended = run(batch.job)

        assert (ended.status, ended.messages) == (1, []), seed
        assert batch.tables() == right, seed
        assert run(batch.job).status == 1
        assert batch.reused("read") == 11


def test_a_damaged_store_never_gives_a_wrong_number(finished: Batch, tmp_path: Path) -> None:
    damage_stores(finished, tmp_path / "batch", range(10))


@pytest.mark.long
def test_a_damaged_store_never_gives_a_wrong_number_in_many_cases(finished: Batch, tmp_path: Path) -> None:
    damage_stores(finished, tmp_path / "batch", range(10, 210))


def test_a_second_run_is_told_who_holds_the_folder_and_harms_nothing(batch: Batch, changed: dict[str, bytes]) -> None:
    batch.change()
    (batch.output / STORE).unlink()
    first = batch.start("--workers", "1")
    try:
        wait_for(lambda: first.poll() is not None or str(first.pid) in (batch.output / LOCK).read_text())
        os.killpg(first.pid, signal.SIGSTOP)

        is_refused(run(batch.job), f"in use by process {first.pid} on ", "--output")
    finally:
        os.killpg(first.pid, signal.SIGCONT)

    assert end_of(first).status == 0
    assert batch.tables() == changed


# The clock and the calculations


def test_a_clock_set_back_hides_no_change(
    batch: Batch, recalculated: dict[str, bytes], monkeypatch: pytest.MonkeyPatch
) -> None:
    path = batch.file("ch4_ccsdt.out.gz")
    path.write_bytes(
        gzip.decompress(path.read_bytes())
    )  # told by content: with it the size stays when a digit changes
    real = time.time_ns
    monkeypatch.setattr("rateloom.engine.files.time.time_ns", lambda: real() + YEAR)
    run(batch.job)
    monkeypatch.undo()
    status = path.stat()

    shift_energy(path, compress=False)
    os.utime(path, ns=(status.st_atime_ns, status.st_mtime_ns))
    assert path.stat().st_size == status.st_size
    run(batch.job)

    assert batch.tables() == recalculated


def test_files_from_the_future_are_read_like_any_other(batch: Batch, recalculated: dict[str, bytes]) -> None:
    path = batch.file("ch4_ccsdt.out.gz")
    later = time.time_ns() + YEAR
    os.utime(path, ns=(later, later))
    run(batch.job)
    shift_energy(path)
    os.utime(path, ns=(later, later))

    run(batch.job)

    assert batch.tables() == recalculated


def test_a_calculation_changed_while_it_is_read_is_read_again(
    batch: Batch, recalculated: dict[str, bytes], meanwhile: Callable[[Callable[[int, str], None]], None]
) -> None:
    (batch.output / STORE).unlink()
    path, done_to = batch.file("ch4_ccsdt.out.gz"), []

    def recalculate(_done: int, last: str) -> None:
        # All files have been hashed; this one is among the smallest, which are read last.
        if not done_to and last != "read calculations/ch4_ccsdt.out.gz":
            shift_energy(path)
            done_to.append(last)

    meanwhile(recalculate)
    ended = run(batch.job)

    assert (ended.status, ended.messages) == (0, [])
    assert done_to
    assert batch.tables() == recalculated


# Memory, time and size


KILLS_ITS_WORKER = """
import os, signal, sys
if any("loky" in argument for argument in sys.orig_argv):
    import rateloom.batch.stages.read as stage
    read = stage.read_calculation
    def die_of_one(path, *rest, **more):
        if path == "ts_ch4_h.out.gz":
            os.kill(os.getpid(), signal.SIGKILL)
        return read(path, *rest, **more)
    stage.read_calculation = die_of_one
"""


def test_a_file_that_kills_its_workers_is_withheld_by_name(batch: Batch, tmp_path: Path) -> None:
    (batch.output / STORE).unlink()
    (tmp_path / "sitecustomize.py").write_text(KILLS_ITS_WORKER)

    ended = end_of(batch.start("--workers", "2", env={**os.environ, "PYTHONPATH": str(tmp_path)}))

    assert ended.status == 3
    assert "ch4-h: ts-ch4-h: program-fault" in ended.out
    faults = [line for line in ended.messages if line.startswith("A fault of the program in ")]
    assert faults == ended.messages
    assert len(faults) == 1
    assert "read calculations/ts_ch4_h.out.gz: 2 workers died over it (out of memory?)" in faults[0]
    assert b"h2-h,forward" in (batch.output / "rates.csv").read_bytes()
    assert b"ch4-h,forward" not in (batch.output / "rates.csv").read_bytes()


def test_a_file_too_large_for_the_memory_is_withheld_by_name(batch: Batch, monkeypatch: pytest.MonkeyPatch) -> None:
    from rateloom.calculation.output import decompress

    def too_much(name: str, *rest: Any) -> bytes:
        if name == "ts_ch4_h.out.gz":
            raise MemoryError
        return decompress(name, *rest)

    (batch.output / STORE).unlink()
    right = batch.tables()
    monkeypatch.setattr("rateloom.calculation.output.decompress", too_much)

    assert_withheld(run(batch.job), batch, "Out of memory. Compute with fewer workers (--workers)")

    monkeypatch.undo()
    assert run(batch.job).status == 0
    assert batch.tables() == right


HAS_LITTLE_MEMORY = """
import resource, sys
from rateloom.cli import main
resource.setrlimit(resource.RLIMIT_AS, (1_400_000_000, 1_400_000_000))
sys.exit(main(sys.argv[1:]))
"""


@pytest.mark.long
def test_a_worker_that_may_use_little_memory_gives_up_a_huge_file_alone(batch: Batch) -> None:
    (batch.output / STORE).unlink()
    block = gzip.compress(b" spin spin spin\n" * 1_000_000, compresslevel=1)
    batch.file("ts_ch4_h.out.gz").write_bytes(block * 60)  # unpacks to 960 MB

    ended = end_of(batch.start("--workers", "2", program=("-c", HAS_LITTLE_MEMORY)))

    assert_withheld(ended, batch, "Out of memory")


def assert_withheld(ended: Ended, batch: Batch, reason: str) -> None:
    """Assert that one reaction is withheld for one file that is named with the reason, and the other delivered."""
    assert (ended.status, ended.messages) == (1, [])
    assert "ch4-h: ts-ch4-h: calculation-not-readable" in ended.out
    assert "Delivered 1 of 2 reactions" in ended.out
    audit = (batch.output / "audit.csv").read_text()
    assert "calculations/ts_ch4_h.out.gz: " in audit
    assert reason in audit


@pytest.mark.parametrize("packed", [True, False])
def test_a_file_larger_than_the_limit_is_withheld_until_a_run_allows_more(batch: Batch, packed: bool) -> None:
    path = batch.file("ts_ch4_h.out.gz")
    data = gzip.decompress(path.read_bytes()) + b"\n" * 2_000_000
    path.write_bytes(gzip.compress(data) if packed else data)

    assert_withheld(run(batch.job, "--largest-file", "1"), batch, "allow more with --largest-file")

    assert run(batch.job, "--largest-file", "9").status == 0


def test_a_small_file_that_unpacks_to_a_huge_one_is_refused_at_once(batch: Batch) -> None:
    block = gzip.compress(bytes(10_000_000))
    batch.file("ts_ch4_h.out.gz").write_bytes(block * 100)  # 1 GB from 1 MB
    begun = time.process_time()

    assert_withheld(run(batch.job, "--largest-file", "20"), batch, "unpack to more than 20 MB")

    assert time.process_time() - begun < 10


def test_a_huge_line_is_refused_at_once(batch: Batch) -> None:
    head = gzip.decompress(batch.file("ts_ch4_h.out.gz").read_bytes())
    batch.file("ts_ch4_h.out.gz").write_bytes(head + b"1 " * 10_000_000)
    begun = time.process_time()

    assert_withheld(run(batch.job), batch, "which no program prints")

    assert time.process_time() - begun < 10


def test_a_file_whose_reading_does_not_end_is_given_up(batch: Batch, monkeypatch: pytest.MonkeyPatch) -> None:
    from rateloom.calculation.output import decompress

    def endless(name: str, *rest: Any) -> bytes:
        while name == "ts_ch4_h.out.gz":
            pass
        return decompress(name, *rest)

    (batch.output / STORE).unlink()
    right = batch.tables()
    monkeypatch.setattr("rateloom.calculation.output.decompress", endless)

    ended = run(batch.job, "--seconds-per-file", "1")

    assert_withheld(ended, batch, "Reading took longer than 1 s. Allow more with --seconds-per-file")
    monkeypatch.undo()
    assert run(batch.job).status == 0
    assert batch.tables() == right


def test_the_limits_that_help_shows_are_those_of_the_rooms() -> None:
    from rateloom.batch import FileLimits

    assert FileLimits() == FileLimits(SECONDS_PER_FILE, LARGEST_FILE_MB * 1_000_000)
    assert LARGEST == LARGEST_FILE == LARGEST_FILE_MB * 1_000_000


# The page

SITUATIONS = {
    "The run or the machine dies": test_a_killed_run_is_gone_on_with,
    "The run dies while it writes the tables": test_a_run_killed_among_its_last_writes_leaves_whole_tables,
    "You press Ctrl-C": test_an_interrupted_run_keeps_all_that_was_finished,
    "The disk is full": test_a_full_disk_leaves_the_tables_and_the_next_run_finishes,
    "The output folder cannot be written": test_a_folder_that_cannot_be_written_is_told_before_anything_is_computed,
    "The output folder is removed while a run uses it": test_an_output_folder_removed_under_way_is_told,
    "Two runs use one output folder": test_a_second_run_is_told_who_holds_the_folder_and_harms_nothing,
    "A newer version has used the output folder": test_a_store_of_a_newer_version_is_left_alone,
    "The store is damaged": test_a_damaged_store_never_gives_a_wrong_number,
    "The clock was set back": test_a_clock_set_back_hides_no_change,
    "A calculation has a time stamp in the future": test_files_from_the_future_are_read_like_any_other,
    "A calculation is rewritten while it is being read": test_a_calculation_changed_while_it_is_read_is_read_again,
    "Reading a file kills the worker": test_a_file_that_kills_its_workers_is_withheld_by_name,
    "A file needs more memory than there is": test_a_file_too_large_for_the_memory_is_withheld_by_name,
    "A file is very large": test_a_file_larger_than_the_limit_is_withheld_until_a_run_allows_more,
    "A small compressed file unpacks to a huge one": test_a_small_file_that_unpacks_to_a_huge_one_is_refused_at_once,
    "A file has an endless line": test_a_huge_line_is_refused_at_once,
    "Reading a file does not end": test_a_file_whose_reading_does_not_end_is_given_up,
}


def test_every_situation_of_the_page_has_its_test() -> None:
    headings = re.findall(r"^## (.+)$", PAGE.read_text(encoding="utf-8"), flags=re.MULTILINE)

    assert headings == list(SITUATIONS)
