"""Fingerprints of input files: SHA-256, asked for only when size, times or inode say that the file may have changed.

A file written in the last moments before it was hashed may change again without a new time stamp; such a fingerprint
is not trusted the next time (the racy-timestamp case). Nor is one that seems older than the file, as after a clock
was set back.
"""

import hashlib
import os
import stat
import time
from collections.abc import Iterable
from dataclasses import dataclass, replace
from pathlib import Path

RACY_NANOSECONDS = 2_000_000_000
"""Coarsest time stamp of a file system in use (FAT: 2 s)."""
UNREADABLE = b"unreadable: "
"""How the digest of a file that could not be read begins."""
LARGEST_FILE = 1_000_000_000
"""Nothing larger is read [bytes] unless asked for: a worker holds the whole file in memory."""


@dataclass(frozen=True, slots=True)
class FileState:
    """What the file system said of a file when its content was hashed."""

    size: int
    modified: int
    """[ns]"""
    inode: int
    sha256: bytes
    """Empty where the file could not be read."""
    hashed: int
    """When it was hashed [ns]."""
    error: str = ""
    """Why it could not be read."""
    changed: int = 0
    """Change of content or of the time above [ns]: notices a file that was rewritten and given its old time."""

    @property
    def digest(self) -> bytes:
        """What the content adds to a key; a file that cannot be read counts by the reason."""
        return self.sha256 or UNREADABLE + self.error.encode(errors="replace")

    def still_holds(self, status: os.stat_result) -> bool:
        """Tell whether the file is surely the one that was hashed."""
        seen = (self.size, self.modified, self.changed, self.inode)
        same = seen == (status.st_size, status.st_mtime_ns, status.st_ctime_ns, status.st_ino)
        return same and bool(self.sha256) and max(self.modified, self.changed) < self.hashed - RACY_NANOSECONDS


def fingerprint(path: str, largest: int = LARGEST_FILE) -> FileState:
    """Hash a file; one that cannot be read, or is larger than ``largest`` bytes, has an empty hash."""
    hashed = time.time_ns()
    try:
        status = Path(path).stat()
        fault = _fault_of(status, largest)
        if fault:
            return FileState(0, 0, 0, b"", hashed, fault)
        with Path(path).open("rb") as file:
            status = os.fstat(file.fileno())
            digest = hashlib.file_digest(file, "sha256").digest()
    except OSError as error:
        return FileState(0, 0, 0, b"", hashed, error.strerror or str(error))
    except ValueError as error:  # a NUL in the name
        return FileState(0, 0, 0, b"", hashed, str(error))
    return FileState(status.st_size, status.st_mtime_ns, status.st_ino, digest, hashed, changed=status.st_ctime_ns)


def _fault_of(status: os.stat_result, largest: int) -> str:
    """Say why a file is not opened at all: opening a pipe waits for ever, a device never ends."""
    if stat.S_ISDIR(status.st_mode):
        return "Is a directory"
    if not stat.S_ISREG(status.st_mode):
        return "Not a regular file"
    if status.st_size <= largest:
        return ""
    return f"Larger than {largest / 1e6:g} MB. If it is an output all the same, allow more with --largest-file."


class Fingerprints:
    """Fingerprints of the files of one run, those of the run before in front of them.

    Parameters
    ----------
    known
        What the run before saw, by path.
    largest
        Files above this size [bytes] count as unreadable.
    """

    def __init__(self, known: dict[str, FileState], largest: int = LARGEST_FILE) -> None:
        self._known = known
        self._largest = largest
        self.states: dict[str, FileState] = {}
        """The files asked for so far."""

    def __getitem__(self, path: str) -> FileState:
        """Give the state of a file, hashing it only where that is needed."""
        if path not in self.states:
            self.states[path] = self._trusted(path) or self._fingerprint(path)
        return self.states[path]

    def look_ahead(self, paths: Iterable[str]) -> None:
        """Take the fingerprints of many files at once: reading one overlaps hashing another."""
        fresh: list[str] = []
        for path in dict.fromkeys(paths):
            if path not in self.states:
                if state := self._trusted(path):
                    self.states[path] = state
                else:
                    fresh.append(path)
        if fresh:
            from concurrent.futures import ThreadPoolExecutor

            with ThreadPoolExecutor(max_workers=8) as threads:
                self.states.update(zip(fresh, threads.map(self._fingerprint, fresh), strict=True))

    def again(self, path: str) -> FileState:
        """Hash a file that was found to have changed under way."""
        self.states[path] = self._fingerprint(path)
        return self.states[path]

    def give_up(self, path: str, reason: str) -> None:
        """Count a file as unreadable for the rest of the run; the next one looks afresh."""
        self.states[path] = replace(self[path], sha256=b"", error=reason)

    def _fingerprint(self, path: str) -> FileState:
        return fingerprint(path, self._largest)

    def _trusted(self, path: str) -> FileState | None:
        """Give what the run before saw, where the file is surely the same."""
        known = self._known.get(path)
        if known is not None:
            try:
                if known.still_holds(Path(path).stat()):
                    return known
            except (OSError, ValueError):
                pass
        return None
