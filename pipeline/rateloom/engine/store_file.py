"""The SQLite file behind the store: opened, checked, begun anew where it is unsound, held by one run at a time."""

import contextlib
import fcntl
import os
import socket
import sqlite3
from collections.abc import Iterator
from pathlib import Path

from rateloom.errors import StoreBusyError, StoreError, StoreVersionError

STORE_NAME = ".store.sqlite"
MENDED_NAME = f"{STORE_NAME}.new"
LOCK_NAME = ".store.lock"
STORE_VERSION = 1
PROGRAM_MARK = 0x524C0000
"""Beside the version in the header stands this mark plus the version: a flipped bit is no newer version."""

_TABLES = {
    "results": "CREATE TABLE results (key BLOB PRIMARY KEY, digest BLOB NOT NULL, seal BLOB NOT NULL, "
    "remarks BLOB NOT NULL) WITHOUT ROWID",
    "contents": "CREATE TABLE contents (digest BLOB PRIMARY KEY, value BLOB NOT NULL)",
    "notes": "CREATE TABLE notes (name TEXT PRIMARY KEY, content BLOB NOT NULL, seal BLOB NOT NULL)",
}
_NO_DAMAGE = frozenset(
    (
        sqlite3.SQLITE_BUSY,
        sqlite3.SQLITE_LOCKED,
        sqlite3.SQLITE_FULL,
        sqlite3.SQLITE_IOERR,
        sqlite3.SQLITE_NOMEM,
        sqlite3.SQLITE_PERM,
        sqlite3.SQLITE_INTERRUPT,
        sqlite3.SQLITE_READONLY,
        sqlite3.SQLITE_CANTOPEN,
    )
)


SQLITE_ERRORS = (sqlite3.Error, UnicodeDecodeError)
"""What SQLite raises; the second where its message quotes damaged text."""


class UnsoundFileError(Exception):
    """The file is not a store that this program wrote."""


def is_damage(error: Exception) -> bool:
    """Tell damage of the file from a full disk, a lock or missing rights."""
    code = _code(error)
    return isinstance(error, UnicodeDecodeError) or (code is not None and code not in _NO_DAMAGE)


def _code(error: Exception) -> int | None:
    """Primary result code of SQLite."""
    code: int | None = getattr(error, "sqlite_errorcode", None)
    return None if code is None else code & 0xFF


def open_connection(path: Path) -> sqlite3.Connection:
    """Open a store file for writing; one that is unsound is begun anew, for all it held can be computed again.

    Raises
    ------
    StoreVersionError
        A newer version wrote it.
    StoreError
        The folder cannot be written.
    """
    try:
        try:
            return _open_for_writing(path)
        except UnsoundFileError:
            remove_store(path)
            return _open_for_writing(path)
    except (*SQLITE_ERRORS, UnsoundFileError) as error:
        msg = f"{path} cannot be opened: {error}. Mend the folder, or name another one with --output."
        raise StoreError(msg) from error


def _open_for_writing(path: Path) -> sqlite3.Connection:
    connection = sqlite3.connect(f"{path.absolute().as_uri()}?mode=rwc", uri=True, timeout=1.0)
    try:
        # Exclusive: no shared memory, which network file systems do not have.
        connection.execute("PRAGMA locking_mode = EXCLUSIVE")
        if not _version_of(connection, path):
            make_tables(connection)
        _check_tables(connection)
        connection.execute("PRAGMA journal_mode = WAL")
        connection.execute("PRAGMA synchronous = NORMAL")
        # Writing the version once more shows here, not after an hour of work, whether the file can be written.
        connection.execute(f"PRAGMA user_version = {STORE_VERSION}")
    except SQLITE_ERRORS as error:
        connection.close()
        # A damaged header can make a file seem read-only.
        seems_read_only = _code(error) == sqlite3.SQLITE_READONLY
        if is_damage(error) or (seems_read_only and os.access(path, os.W_OK) and os.access(path.parent, os.W_OK)):
            raise UnsoundFileError(str(error)) from error
        raise
    except BaseException:
        connection.close()
        raise
    return connection


def _version_of(connection: sqlite3.Connection, path: Path) -> int:
    """Give the version of a store, 0 for a file just made."""
    connection.text_factory = bytes  # damaged text must not raise before its seal is looked at
    version: int = connection.execute("PRAGMA user_version").fetchone()[0]
    mark: int = connection.execute("PRAGMA application_id").fetchone()[0]
    fresh = connection.execute("SELECT count(*) FROM sqlite_master").fetchone()[0] == 0
    if version == mark == 0 and fresh:
        return 0
    if version < STORE_VERSION or mark != PROGRAM_MARK + version:
        msg = "its header is not one of this program"
        raise UnsoundFileError(msg)
    if version > STORE_VERSION:
        msg = (
            f"{path} was written by a newer version (store {version}, this program knows {STORE_VERSION}). "
            "Use that version, or name another folder with --output."
        )
        raise StoreVersionError(msg)
    return version


def make_tables(connection: sqlite3.Connection) -> None:
    """Make the tables of an empty store."""
    with connection:
        connection.execute("BEGIN")
        for statement in _TABLES.values():
            connection.execute(statement)
        connection.execute(f"PRAGMA application_id = {PROGRAM_MARK + STORE_VERSION}")
        connection.execute(f"PRAGMA user_version = {STORE_VERSION}")


def _check_tables(connection: sqlite3.Connection) -> None:
    """Refuse a file with other tables than ours, or with triggers: it would run what it says."""
    rows = connection.execute("SELECT name, sql FROM sqlite_master WHERE sql IS NOT NULL").fetchall()
    if dict(rows) != {name.encode(): statement.encode() for name, statement in _TABLES.items()}:
        msg = "its tables are not those of this program"
        raise UnsoundFileError(msg)


def remove_store(path: Path) -> None:
    """Remove a store file and its journals."""
    for ending in ("", "-wal", "-shm", "-journal"):
        Path(f"{path}{ending}").unlink(missing_ok=True)


@contextlib.contextmanager
def hold(folder: Path) -> Iterator[None]:
    """Hold the lock of an output folder; the system frees it however the process ends.

    Raises
    ------
    StoreBusyError
        Another run holds it.
    """
    with (folder / LOCK_NAME).open("a+", encoding="utf-8") as file:
        try:
            fcntl.flock(file, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except BlockingIOError:
            msg = f"{folder} is in use by {_holder(folder)}. Wait for it, or name another folder with --output."
            raise StoreBusyError(msg) from None
        file.seek(0)
        file.truncate()
        file.write(f"process {os.getpid()} on {socket.gethostname()}")
        file.flush()
        yield


def _holder(folder: Path) -> str:
    text = (folder / LOCK_NAME).read_text(encoding="utf-8", errors="replace")
    return text[:200].strip() or "another process"


def connect_reader(folder: Path) -> sqlite3.Connection:
    """Open a store for reading; an empty one in memory where there is none or it is unsound.

    Raises
    ------
    StoreBusyError
        A run holds it.
    StoreVersionError
        A newer version wrote it.
    """
    path = folder / STORE_NAME
    # A folder that cannot be written has no place for a reader's helper files: without a journal none are needed.
    modes = ["mode=ro", "mode=ro&immutable=1"] if not Path(f"{path}-wal").exists() else ["mode=ro"]
    for mode in modes if path.is_file() else []:
        connection = sqlite3.connect(f"{path.absolute().as_uri()}?{mode}", uri=True, timeout=1.0)
        try:
            if _version_of(connection, path):
                _check_tables(connection)
                return connection
        except StoreVersionError:
            connection.close()
            raise
        except (*SQLITE_ERRORS, UnsoundFileError) as error:
            if _code(error) == sqlite3.SQLITE_BUSY:
                connection.close()
                msg = f"{folder} is in use by {_holder(folder)}. Ask again when it has ended."
                raise StoreBusyError(msg) from error
        connection.close()
    connection = sqlite3.connect(":memory:")
    make_tables(connection)
    return connection
