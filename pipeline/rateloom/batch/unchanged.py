"""The short way of a run over unchanged input: known from the files' time stamps alone, without loading the physics.

The store keeps, for the last whole run, the state of every file that went in and of every table that came out. If all
of them are as they were, nothing is computed, and that takes no longer than asking the file system.
"""

from dataclasses import dataclass
from pathlib import Path

from rateloom.batch.summary import Summary
from rateloom.engine.codec import decode
from rateloom.engine.files import FileState
from rateloom.engine.store import Store

NOTE = "last run"


@dataclass(frozen=True, slots=True, kw_only=True)
class LastRun:
    """What a whole run read and wrote."""

    version: str
    """Of the program, with its stages."""
    job: str
    files: dict[str, FileState]
    """Job files and calculations, by path."""
    tables: dict[str, tuple[int, int, int]]
    """Size, time [ns] and inode of each table, by name."""
    summary: Summary
    provenance: bytes
    """``run.json`` of a run that computes nothing."""
    no_changes: bytes
    """``changes.csv`` of such a run."""


def table_state(path: Path) -> tuple[int, int, int]:
    """Say what the file system says of a table; zeros where there is none."""
    try:
        status = path.stat()
    except OSError:
        return 0, 0, 0
    return status.st_size, status.st_mtime_ns, status.st_ino


def _is_same(path: str, state: FileState) -> bool:
    try:
        return state.still_holds(Path(path).stat())
    except OSError:
        return bool(state.error)


def last_run(store: Store, job: str, folder: Path, version: str) -> LastRun | None:
    """Give the last run if a run now would compute nothing, None otherwise.

    Parameters
    ----------
    store
        Of the output folder.
    job
        Absolute path of the job file.
    folder
        The output folder.
    version
        Of the program and its stages.
    """
    note = store.note(NOTE)
    if note is None:
        return None
    last: LastRun = decode(note, LastRun)
    if (last.version, last.job) != (version, job):
        return None
    if not all(_is_same(path, state) for path, state in last.files.items()):
        return None
    if not all(table_state(folder / name) == state for name, state in last.tables.items()):
        return None
    return last
