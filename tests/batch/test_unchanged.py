"""The short way over unchanged input, and everything that must not take it."""

import json
import os
import subprocess
import sys
import time
from collections.abc import Callable
from pathlib import Path

import pytest

from rateloom.batch import run_job, unchanged_run
from rateloom.engine import open_store

Quiet = Callable[[int, int, str], None]
PAST = 3_600_000_000_000
"""An hour [ns]: well beyond the resolution of time stamps."""


@pytest.fixture
def settled(job: Path, quiet: Quiet, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The small job, run, with files whose time stamps are old enough to be trusted."""
    real = time.time_ns
    # Files just copied count as racy; hash them an hour later.
    monkeypatch.setattr("rateloom.engine.files.time.time_ns", lambda: real() + PAST)
    run_job(str(job), workers=1, progress=quiet)
    return job


def test_nothing_changed_is_known_without_any_physics(settled: Path) -> None:
    program = (
        "import sys\n"
        "from rateloom.batch import unchanged_run\n"
        "summary = unchanged_run(sys.argv[1])\n"
        "print(summary.delivered, sum(summary.computed.values()), sum(summary.reused.values()) > 40)\n"
        "print(sorted({'numpy', 'scipy', 'cclib', 'pydantic', 'networkx', 'yaml'} & set(sys.modules)))\n"
    )
    done = subprocess.run([sys.executable, "-c", program, str(settled)], capture_output=True, text=True, check=True)

    assert done.stdout.splitlines() == ["2 0 True", "[]"]


def test_the_record_of_the_run_says_that_nothing_was_computed(settled: Path) -> None:
    unchanged_run(str(settled))

    stages = json.loads((settled.parent / "tables" / "run.json").read_text())["stages"]
    assert {counts["computed"] for counts in stages.values()} == {0}
    assert stages["rate"]["reused"] == 2


def test_it_is_the_same_from_any_folder(settled: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.chdir(settled.parent / "calculations")

    assert unchanged_run("../job.yaml") is not None


def touch(path: Path) -> None:
    os.utime(path, ns=(1, 1))


@pytest.mark.parametrize(
    "change",
    [
        pytest.param(lambda folder: (folder / "job.yaml").write_text("title: new"), id="job file"),
        pytest.param(lambda folder: touch(folder / "calculations" / "ch4.out.gz"), id="a calculation"),
        pytest.param(lambda folder: (folder / "calculations" / "ch4.out.gz").unlink(), id="a calculation gone"),
        pytest.param(lambda folder: touch(folder / "tables" / "rates.csv"), id="a table"),
        pytest.param(lambda folder: (folder / "tables" / "audit.csv").unlink(), id="a table gone"),
        pytest.param(lambda folder: (folder / "tables" / ".store.sqlite").write_bytes(b"?"), id="the store"),
    ],
)
def test_any_change_takes_the_long_way(settled: Path, change: Callable[[Path], object]) -> None:
    change(settled.parent)

    assert unchanged_run(str(settled)) is None


def test_another_program_takes_the_long_way(settled: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("rateloom.__version__", "0.0.0")

    assert unchanged_run(str(settled)) is None


def test_a_note_of_another_shape_takes_the_long_way(settled: Path) -> None:
    with open_store(settled.parent / "tables") as store:
        store.put_notes({"last run": b"\xc0"})

    assert unchanged_run(str(settled)) is None


def test_a_folder_without_a_store_is_left_alone(job: Path) -> None:
    assert unchanged_run(str(job)) is None
    assert not (job.parent / "tables").exists()
