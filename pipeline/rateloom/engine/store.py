"""The store: one SQLite file that holds every stage result under the hash of what it depends on.

It holds no pickles and trusts nothing it reads: a result is taken only if its seal (over key, digest and remarks) and
its digest (over the value) are right. Values lie under their digests, so that equal ones are kept once and the index
of results stays small.
"""

import contextlib
import hashlib
import sqlite3
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import Any

import msgspec

from rateloom.engine.codec import decode, digest_of, encode
from rateloom.engine.files import FileState
from rateloom.engine.schedule import Past
from rateloom.engine.store_file import (
    MENDED_NAME,
    SQLITE_ERRORS,
    STORE_NAME,
    connect_reader,
    hold,
    is_damage,
    open_connection,
    remove_store,
)
from rateloom.errors import StoreError

ResultRow = tuple[bytes, bytes, bytes, bytes]
"""key, digest, seal, remarks"""


def _seal(key: bytes, digest: bytes, remarks: bytes) -> bytes:
    """Hash a row; key and digest have one length each, so that the parts need no marks between them."""
    return hashlib.blake2b(key + digest + remarks, digest_size=16).digest()


class Store:
    """Results and notes of one output folder.

    Parameters
    ----------
    connection
        An open store.
    path
        Its file, where it is open for writing.
    """

    def __init__(self, connection: sqlite3.Connection, path: Path | None = None) -> None:
        self._path = path
        self._use(connection)

    def _use(self, connection: sqlite3.Connection) -> None:
        self._connection = connection
        self._inode = self._path.stat().st_ino if self._path else 0
        self._index: dict[bytes, bytes] | None = None
        self.is_torn = False
        """Whether results were met that cannot be read any more: remarks may be missing until it is mended."""

    def close(self) -> None:
        """Close the file."""
        self._connection.close()

    @property
    def _digests(self) -> dict[bytes, bytes]:
        """Digest of every sound result by key, read once."""
        if self._index is None:
            self._index = {key: digest for key, digest, _, _ in self._sound_rows("")}
        return self._index

    def _sound_rows(self, condition: str) -> list[ResultRow]:
        """Give the rows whose seal is right, as far as the file can be read."""
        rows: list[ResultRow] = []
        try:
            # One row at a time: what comes before a damaged page is kept.
            rows.extend(self._connection.execute(f"SELECT key, digest, seal, remarks FROM results {condition}"))
        except SQLITE_ERRORS:
            self.is_torn = True
        try:
            sound = [row for row in rows if _seal(row[0], row[1], row[3]) == row[2]]
        except TypeError:  # a damaged row holds a number
            blobs = [row for row in rows if all(isinstance(column, bytes) for column in row)]
            sound = [row for row in blobs if _seal(row[0], row[1], row[3]) == row[2]]
        self.is_torn |= len(sound) < len(rows)
        return sound

    def digest(self, key: bytes) -> bytes | None:
        """Give the digest of a stored result, None where there is none."""
        return self._digests.get(key)

    def value(self, key: bytes) -> bytes | None:
        """Give the encoded value of a result, None where it is missing or damaged."""
        digest = self.digest(key)
        return None if digest is None else self._content(digest)

    def _content(self, digest: bytes) -> bytes | None:
        try:
            row = self._connection.execute("SELECT value FROM contents WHERE digest = ?", (digest,)).fetchone()
        except SQLITE_ERRORS:
            return None
        return row[0] if row is not None and isinstance(row[0], bytes) and digest_of(row[0]) == digest else None

    def remarks(self, keys: Iterable[bytes]) -> dict[bytes, bytes]:
        """Give the encoded remarks of those results that have any."""
        wanted = set(keys)
        rows = self._sound_rows("WHERE length(remarks) > 0")
        return {key: remarks for key, _, _, remarks in rows if key in wanted}

    def put(self, results: Iterable[tuple[bytes, bytes, bytes]]) -> None:
        """Keep results (key, value, remarks) in one transaction.

        Raises
        ------
        StoreError
            They cannot be written.
        """
        rows: list[ResultRow] = []
        contents: dict[bytes, bytes] = {}
        for key, value, remarks in results:
            digest = digest_of(value)
            contents[digest] = value
            rows.append((key, digest, _seal(key, digest, remarks), remarks))
        if rows:
            self._write("INSERT OR REPLACE INTO contents VALUES (?, ?)", contents.items(), also=rows)
            self._digests.update((key, digest) for key, digest, _, _ in rows)

    def forget(self, keys: Iterable[bytes]) -> None:
        """Remove results."""
        gone = [(key,) for key in keys]
        self._write("DELETE FROM results WHERE key = ?", gone)
        for (key,) in gone:
            self._digests.pop(key, None)

    def keep_only(self, keys: set[bytes], factor: int = 4) -> None:
        """Drop the results that this job does not use, once they outnumber the used ones by ``factor``."""
        if len(self._digests) > factor * max(len(keys), 1):
            self.forget(set(self._digests) - keys)
            self._write("DELETE FROM contents WHERE digest NOT IN (SELECT digest FROM results)", [()])

    def mend(self) -> int:
        """Carry all that is sound over into a new file; tell how many results were lost.

        Raises
        ------
        StoreError
            The new file cannot be written.
        """
        known = len(self._digests)
        if self._path is None:
            return 0
        rows = [row for row in self._sound_rows("") if self._content(row[1]) is not None]
        beside = self._path.with_name(MENDED_NAME)
        remove_store(beside)
        with contextlib.closing(Store(open_connection(beside), beside)) as new:
            for begin in range(0, len(rows), 1000):
                part = rows[begin : begin + 1000]
                values = {digest: self._content(digest) for _, digest, _, _ in part}
                new.put((key, value, remarks) for key, digest, _, remarks in part if (value := values[digest]))
            new.put_notes(self._sound_notes())
        self._connection.close()
        remove_store(self._path)
        beside.replace(self._path)
        self._use(open_connection(self._path))
        return known - len(self._digests)

    def note(self, name: str) -> bytes | None:
        """Give a note, None where it is missing or damaged."""
        row = None
        with contextlib.suppress(*SQLITE_ERRORS):
            row = self._connection.execute("SELECT content, seal FROM notes WHERE name = ?", (name,)).fetchone()
        if row is None or not isinstance(row[0], bytes) or digest_of(name.encode(), row[0]) != row[1]:
            return None
        return row[0]

    def _sound_notes(self) -> dict[str, bytes]:
        """Give all notes that are sound."""
        names: list[tuple[bytes]] = []
        with contextlib.suppress(*SQLITE_ERRORS):
            names.extend(self._connection.execute("SELECT name FROM notes"))
        notes = {}
        for (name,) in names:
            with contextlib.suppress(UnicodeDecodeError, AttributeError):  # a damaged name
                if (content := self.note(name.decode())) is not None:
                    notes[name.decode()] = content
        return notes

    def put_notes(self, notes: dict[str, bytes]) -> None:
        """Keep notes in one transaction.

        Raises
        ------
        StoreError
            They cannot be written.
        """
        rows = [
            (name, content, digest_of(name.encode(), content))
            for name, content in notes.items()
            if self.note(name) != content
        ]
        if rows:
            self._write("INSERT OR REPLACE INTO notes VALUES (?, ?, ?)", rows)

    def _write(self, statement: str, rows: Iterable[tuple[object, ...]], also: Iterable[ResultRow] = ()) -> None:
        """Write in one transaction; a damaged file is mended first."""
        rows = list(rows)
        try:
            try:
                self._write_once(statement, rows, also)
            except SQLITE_ERRORS as error:
                if not is_damage(error):
                    raise
                self.mend()
                self._write_once(statement, rows, also)
        except (*SQLITE_ERRORS, OSError) as error:
            msg = f"{self._path} cannot be written: {error}. Free some space or mend the rights, then run again."
            raise StoreError(msg) from error

    def _write_once(self, statement: str, rows: list[tuple[object, ...]], also: Iterable[ResultRow]) -> None:
        self._still_there()
        with self._connection:
            self._connection.executemany(statement, rows)
            self._connection.executemany("INSERT OR REPLACE INTO results VALUES (?, ?, ?, ?)", also)

    def _still_there(self) -> None:
        """Notice a folder that was removed: SQLite would go on writing into nothing."""
        try:
            if self._path is None or self._path.stat().st_ino == self._inode:
                return
        except OSError:
            pass
        msg = f"{self._path} was removed or replaced while the run was using it. Run again."
        raise StoreError(msg)

    def past(self) -> dict[str, Past]:
        """Say what the last results were made of, by node."""
        return _decode_note(self.note("past"), dict[str, Past])

    def files(self) -> dict[str, FileState]:
        """Give the fingerprints of the last run, by path."""
        return _decode_note(self.note("files"), dict[str, FileState])

    def remember(self, past: dict[str, Past], files: dict[str, FileState]) -> None:
        """Keep both for the next run."""
        self.put_notes({"past": encode(past), "files": encode(files)})


def _decode_note(content: bytes | None, kind: object) -> Any:
    """Decode a note; one of another form, as of a version in between, counts as none."""
    try:
        return {} if content is None else decode(content, kind)
    except msgspec.DecodeError:
        return {}


@contextlib.contextmanager
def open_store(folder: Path) -> Iterator[Store]:
    """Open the store of an output folder for writing, making both where they are missing.

    Raises
    ------
    StoreBusyError
        Another run holds it.
    StoreVersionError
        A newer version wrote it.
    StoreError
        The folder cannot be written.
    """
    with contextlib.ExitStack() as stack:
        try:
            folder.mkdir(parents=True, exist_ok=True)
            stack.enter_context(hold(folder))
            remove_store(folder / MENDED_NAME)  # of a run that was killed while it mended the store
            store = Store(open_connection(folder / STORE_NAME), folder / STORE_NAME)
        except OSError as error:
            msg = f"{folder} cannot be used: {error.strerror or error}. Name another folder with --output."
            raise StoreError(msg) from error
        stack.callback(store.close)
        yield store


@contextlib.contextmanager
def read_store(folder: Path) -> Iterator[Store]:
    """Open the store of an output folder for reading; an empty one where there is none or it is unsound.

    Raises
    ------
    StoreBusyError
        A run holds it.
    StoreVersionError
        A newer version wrote it.
    """
    with contextlib.closing(Store(connect_reader(folder))) as store:
        yield store
