"""Fingerprints: hashing is spared only where the file is surely the same."""

import os
import time
from dataclasses import replace
from hashlib import sha256
from pathlib import Path

import pytest

from rateloom.engine import FileState, Fingerprints
from rateloom.engine import files as files_module
from rateloom.engine.files import fingerprint

HOUR = 3600 * 10**9


@pytest.fixture
def path(tmp_path: Path) -> str:
    file = tmp_path / "a.out"
    file.write_text("energy -1.5", encoding="utf-8")
    return str(file)


@pytest.fixture
def hashed(monkeypatch: pytest.MonkeyPatch) -> list[str]:
    """The files that are hashed from now on."""
    names: list[str] = []

    def watched(path: str, largest: int = files_module.LARGEST_FILE) -> FileState:
        names.append(Path(path).name)
        return fingerprint(path, largest)

    monkeypatch.setattr(files_module, "fingerprint", watched)
    return names


def an_hour_later(state: FileState) -> FileState:
    """What would have been noted if the file had been hashed long after it was written."""
    return replace(state, hashed=state.hashed + HOUR)


def test_the_hash_is_that_of_the_content(path: str) -> None:
    assert Fingerprints({})[path].sha256 == sha256(b"energy -1.5").digest()


def test_an_unchanged_file_is_not_hashed_again(path: str, hashed: list[str]) -> None:
    known = {path: an_hour_later(fingerprint(path))}

    assert Fingerprints(known)[path] == known[path]
    assert hashed == []


def test_a_file_written_just_before_it_was_hashed_is_hashed_again(path: str, hashed: list[str]) -> None:
    files = Fingerprints({path: fingerprint(path)})
    files.look_ahead([path])

    assert files[path].sha256
    assert hashed == ["a.out"]


def test_the_same_size_and_time_do_not_hide_a_rewritten_file(path: str) -> None:
    before = an_hour_later(fingerprint(path))
    status = Path(path).stat()
    time.sleep(0.02)  # the system's clock of file changes ticks every few milliseconds

    Path(path).write_text("energy -2.5", encoding="utf-8")
    os.utime(path, ns=(status.st_atime_ns, status.st_mtime_ns))

    assert Fingerprints({path: before})[path].sha256 == sha256(b"energy -2.5").digest()


def test_a_fingerprint_older_than_its_file_is_not_trusted(path: str, hashed: list[str]) -> None:
    set_back = replace(fingerprint(path), hashed=time.time_ns() - HOUR)

    assert Fingerprints({path: set_back})[path].sha256
    assert hashed == ["a.out"]


def test_a_file_from_the_future_is_hashed_every_time(path: str, hashed: list[str]) -> None:
    future = time.time_ns() + HOUR
    os.utime(path, ns=(future, future))
    known = {path: fingerprint(path)}

    assert Fingerprints(known)[path].sha256
    assert hashed == ["a.out"]


def test_looking_ahead_gives_the_same_as_looking(tmp_path: Path) -> None:
    paths = []
    for i in range(20):
        (tmp_path / f"{i}").write_bytes(bytes([i]))
        paths.append(str(tmp_path / f"{i}"))
    paths.append(str(tmp_path / "missing"))
    files, alone = Fingerprints({}), Fingerprints({})

    files.look_ahead(paths)

    assert [files[p].digest for p in paths] == [alone[p].digest for p in paths]


def test_what_cannot_be_read_counts_by_its_reason(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    large = tmp_path / "large"
    large.write_bytes(b"12345678")
    files = Fingerprints({}, largest=7)

    reasons = [files[str(p)].error for p in (tmp_path / "none", tmp_path, tmp_path / "pipe", large)]

    assert reasons == [
        "No such file or directory",
        "Is a directory",
        "Not a regular file",
        "Larger than 7e-06 MB. If it is an output all the same, allow more with --largest-file.",
    ]
    assert files[str(large)].digest.startswith(b"unreadable: Larger than 7e-06 MB")
    assert Fingerprints({})["nul\0.out"].error.startswith("embedded null")


def test_a_device_that_never_ends_is_not_opened() -> None:
    assert Fingerprints({})["/dev/zero"].error == "Not a regular file"


def test_a_file_given_up_is_looked_at_afresh_by_the_next_run(path: str) -> None:
    files = Fingerprints({})
    files.give_up(path, "it keeps changing")
    assert files[path].digest == b"unreadable: it keeps changing"

    assert Fingerprints({path: an_hour_later(files[path])})[path].sha256 == sha256(b"energy -1.5").digest()
