"""The short way of a run over unchanged input: known from the files' time stamps alone, without loading the physics.

The store keeps, for the last whole run, the state of every file that went in and of every table that came out. If all
of them are as they were, nothing is computed, and that takes no longer than asking the file system. Whatever is
doubtful (a file changed within the resolution of time stamps, another version of the program) takes the long way.
"""

import os
import time
from dataclasses import dataclass, replace
from pathlib import Path

import rateloom
from rateloom.batch.summary import Summary
from rateloom.engine import STORE_NAME, FileState, Store, decode, digest_of, encode, open_store
from rateloom.output import write_files

NOTE = "last run"
OUTPUT_KEY = b"output:"
LONGEST_JOB = 50_000_000
"""Bytes; a longer file is left to the loader, which refuses it."""

TableState = tuple[int, int, int]


@dataclass(frozen=True, slots=True, kw_only=True)
class LastRun:
    """What a whole run read and wrote."""

    program: bytes
    """As ``program_state`` gives it."""
    job: str
    """Absolute path of the job file."""
    files: dict[str, FileState]
    """Job files and calculations, by path."""
    tables: dict[str, TableState]
    """Size, time [ns] and inode of each table, by name."""
    summary: Summary
    """Of a run that computes nothing."""
    now: dict[str, bytes]
    """The files that tell of the run itself, as such a run writes them."""


def program_state() -> bytes:
    """Hash the version of the program and the size and time of its modules: any other program computes anew."""
    modules = sorted(Path(rateloom.__file__).parent.rglob("*.py"))
    states = (f"{path.name} {status.st_size} {status.st_mtime_ns}" for path in modules for status in [path.stat()])
    return digest_of(rateloom.__version__.encode(), "\n".join(states).encode())


def table_state(path: Path) -> TableState:
    """Say what the file system says of a table; zeros where there is none."""
    try:
        status = path.stat()
    except OSError:
        return 0, 0, 0
    return status.st_size, status.st_mtime_ns, status.st_ino


def output_folder(job: Path, output: str | None) -> Path | None:
    """Guess the output folder of a job from the line that names it, without reading YAML.

    A wrong guess does no harm: the store of that folder then knows nothing of this job.
    """
    if output is not None:
        return Path(output).absolute()
    try:
        if job.stat().st_size > LONGEST_JOB:
            return None
        lines = [line for line in job.read_bytes().splitlines() if line.startswith(OUTPUT_KEY)]
    except OSError:
        return None
    if not lines:
        return job.parent / f"{job.stem}-results"
    name = lines[0].removeprefix(OUTPUT_KEY).split(b" #")[0].decode("utf-8", "replace").strip().strip("'\"")
    return Path(os.path.normpath(job.parent / name))


def remember_run(store: Store, folder: Path, last: LastRun) -> None:
    """Keep what a run read and wrote, once its tables stand in their folder."""
    tables = {name: table_state(folder / name) for name in last.tables}
    store.put_notes({NOTE: encode(replace(last, tables=tables))})


def unchanged_run(path: str, output: str | None = None) -> Summary | None:
    """Run a job over unchanged input.

    Parameters
    ----------
    path
        The job file.
    output
        Another output folder than the job names.

    Returns
    -------
    Summary or None
        What the run did; None where something may be out of date, and nothing has been done.

    Raises
    ------
    StoreError, OutputError
        The output folder is in use or cannot be written.
    """
    begun = time.monotonic()
    job = Path(os.path.normpath(Path(path).absolute()))
    folder = output_folder(job, output)
    if folder is None or not (folder / STORE_NAME).exists():
        return None
    with open_store(folder) as store:
        last = _last_run(store, str(job), folder)
        if last is None:
            return None
        write_files(folder, last.now)
    return replace(last.summary, seconds=time.monotonic() - begun)


def _last_run(store: Store, job: str, folder: Path) -> LastRun | None:
    """Give the last run if one now would compute nothing."""
    note = store.note(NOTE)
    if note is None:
        return None
    try:
        last: LastRun = decode(note, LastRun)
    except ValueError:
        # Another version of this program wrote it in another shape.
        return None
    same = (
        last.job == job
        and last.program == program_state()
        and all(_is_same(Path(path), state) for path, state in last.files.items())
        and all(table_state(folder / name) == state for name, state in last.tables.items())
    )
    return last if same else None


def _is_same(path: Path, state: FileState) -> bool:
    try:
        return state.still_holds(path.stat())
    except OSError:
        return bool(state.error)
