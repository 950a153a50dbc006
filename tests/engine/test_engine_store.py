"""The store gives back what was put in or nothing, whatever happens to its file."""

import os
import pickle
import random
import shutil
import signal
import sqlite3
import subprocess
import sys
import textwrap
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from rateloom.engine import FileState, digest_of, open_store, read_store
from rateloom.engine.schedule import Past
from rateloom.engine.store_file import PROGRAM_MARK, STORE_VERSION
from rateloom.errors import StoreBusyError, StoreError, StoreVersionError

FAST_CASES, ALL_CASES = 20, 200


def results(count: int, size: int = 300) -> list[tuple[bytes, bytes, bytes]]:
    """Keys, values and remarks, all different."""
    return [(digest_of(b"%d" % i), b"%d " % i * size, b"remark %d" % i if i % 3 == 0 else b"") for i in range(count)]


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    return tmp_path / "out"


@pytest.fixture
def filled(folder: Path) -> Path:
    """A folder with a store of 200 results."""
    with open_store(folder) as store:
        store.put(results(200))
        store.remember({"a": Past(b"k", 1, b"p", (b"i",))}, {"f": FileState(1, 2, 3, b"h", 4)})
    return folder


def file_of(folder: Path) -> Path:
    return folder / ".store.sqlite"


def test_results_come_back(filled: Path) -> None:
    with read_store(filled) as store:
        assert [store.value(key) for key, _, _ in results(200)] == [value for _, value, _ in results(200)]
        assert store.remarks(key for key, _, _ in results(7)) == {k: r for k, _, r in results(7) if r}
        assert store.digest(results(1)[0][0]) == digest_of(results(1)[0][1])
        assert store.past() == {"a": Past(b"k", 1, b"p", (b"i",))}
        assert store.files() == {"f": FileState(1, 2, 3, b"h", 4)}


def test_a_result_put_twice_is_the_last_one(folder: Path) -> None:
    with open_store(folder) as store:
        store.put([(b"k", b"old", b"x")])
        store.put([(b"k", b"new", b"")])
        assert store.value(b"k") == b"new"
        assert store.remarks([b"k"]) == {}


def test_equal_values_are_kept_once(folder: Path) -> None:
    with open_store(folder) as store:
        store.put([(bytes([i]) * 20, b"x" * 20_000, b"") for i in range(200)])

    assert file_of(folder).stat().st_size < 100_000


def test_results_no_job_uses_are_dropped_once_they_outnumber_the_others(filled: Path) -> None:
    keys = {key for key, _, _ in results(40)}
    with open_store(filled) as store:
        store.keep_only({k for k, _, _ in results(50)})
        assert store.digest(results(200)[199][0]) is not None
        store.keep_only(keys)
    with read_store(filled) as store:
        assert [store.value(k) is not None for k, _, _ in results(200)] == [True] * 40 + [False] * 160
    with sqlite3.connect(file_of(filled)) as connection:
        assert connection.execute("SELECT count(*) FROM contents").fetchone() == (40,)
    connection.close()


def test_no_pickle_is_in_the_store(filled: Path) -> None:
    with sqlite3.connect(file_of(filled)) as connection:
        columns = [
            column
            for table in ("results", "contents", "notes")
            for row in connection.execute(f"SELECT * FROM {table}")
            for column in row
            if isinstance(column, bytes)
        ]
    connection.close()
    assert columns
    assert not any(column.startswith(pickle.dumps(None)[:2]) for column in columns)


def test_a_note_of_another_form_counts_as_none(folder: Path) -> None:
    with open_store(folder) as store:
        store.put_notes({"past": b"\x01", "files": b"\xc1"})
        assert store.past() == {}
        assert store.files() == {}


def test_nothing_is_written_where_nothing_is_new(filled: Path) -> None:
    before = file_of(filled).read_bytes()
    with open_store(filled) as store:
        store.remember(store.past(), store.files())
        store.put([])

    assert file_of(filled).read_bytes()[100:] == before[100:]  # without the header, which counts openings


# Damage


def flip(path: Path, chance: random.Random, count: int = 1) -> None:
    """Change random bytes of a file."""
    data = bytearray(path.read_bytes())
    for _ in range(count):
        data[chance.randrange(len(data))] ^= chance.randrange(1, 256)
    path.write_bytes(data)


def check_sound_or_missing(folder: Path) -> int:
    """Use a damaged store as a run would; give the number of results it lost."""
    with read_store(folder) as store:
        assert all(store.value(key) in (value, None) for key, value, _ in results(200))
        remarks = store.remarks(key for key, _, _ in results(200))
        assert all(remarks.get(key, remark) == remark for key, _, remark in results(200))
    with open_store(folder) as store:
        lost = [result for result in results(200) if store.value(result[0]) is None]
        store.put(lost)
        store.remember({"b": Past(b"k", 1, b"p", ())}, {})
        if any(store.value(key) is None for key, _, _ in results(200)):  # mending in put dropped some more
            store.mend()
            store.put(result for result in results(200) if store.value(result[0]) is None)
        assert [store.value(key) for key, _, _ in results(200)] == [value for _, value, _ in results(200)]
    with read_store(folder) as store:
        assert store.value(results(200)[7][0]) == results(200)[7][1]
        assert store.past() in ({}, {"b": Past(b"k", 1, b"p", ())})
    return len(lost)


def damage_cases(filled: Path, tmp_path: Path, seeds: range) -> int:
    """Damage copies of a store in many ways."""
    lost = 0
    for seed in seeds:
        chance = random.Random(seed)
        copy = tmp_path / f"copy {seed}"
        copy.mkdir()
        shutil.copy(file_of(filled), file_of(copy))
        flip(file_of(copy), chance, count=chance.choice((1, 1, 1, 10, 300)))
        lost += check_sound_or_missing(copy)
        shutil.rmtree(copy)
    return lost


def test_flipped_bytes_are_never_a_wrong_value(filled: Path, tmp_path: Path) -> None:
    assert damage_cases(filled, tmp_path, range(FAST_CASES)) > 0


@pytest.mark.long
def test_flipped_bytes_are_never_a_wrong_value_in_many_cases(filled: Path, tmp_path: Path) -> None:
    assert damage_cases(filled, tmp_path, range(FAST_CASES, ALL_CASES)) > 0


def test_every_byte_of_the_header_may_be_damaged(filled: Path, tmp_path: Path) -> None:
    for place in range(0, 100, 3):
        copy = tmp_path / f"copy {place}"
        copy.mkdir()
        data = bytearray(file_of(filled).read_bytes())
        data[place] ^= 0x55
        file_of(copy).write_bytes(data)
        check_sound_or_missing(copy)


@pytest.mark.parametrize("content", [b"", b"x", b"SQLite format 3\0", b"\0" * 5000, b"not a database at all\n" * 400])
def test_a_foreign_file_is_begun_anew(folder: Path, content: bytes) -> None:
    folder.mkdir()
    file_of(folder).write_bytes(content)

    with read_store(folder) as store:
        assert store.digest(b"k") is None
    with open_store(folder) as store:
        store.put([(b"k", b"v", b"")])
    with read_store(folder) as store:
        assert store.value(b"k") == b"v"


def test_a_cut_store_keeps_what_is_left_or_nothing(filled: Path) -> None:
    data = file_of(filled).read_bytes()
    file_of(filled).write_bytes(data[: len(data) // 2])

    assert check_sound_or_missing(filled) > 0


def test_a_hostile_trigger_is_not_run(filled: Path) -> None:
    with sqlite3.connect(file_of(filled)) as connection:
        connection.execute("CREATE TRIGGER t AFTER INSERT ON results BEGIN DELETE FROM contents; END")
    connection.close()

    with open_store(filled) as store:
        store.put(results(2))
        assert store.value(results(2)[0][0]) == results(2)[0][1]


def test_a_swapped_value_is_noticed(filled: Path) -> None:
    (one, value, _), (two, _, _) = results(2)
    with sqlite3.connect(file_of(filled)) as connection:
        connection.execute("UPDATE results SET digest = ? WHERE key = ?", (digest_of(value), two))
    connection.close()

    with read_store(filled) as store:
        assert store.value(two) is None
        assert store.value(one) == value


def test_mending_keeps_all_that_is_sound_and_the_notes(filled: Path) -> None:
    with sqlite3.connect(file_of(filled)) as connection:
        connection.execute("UPDATE contents SET value = 'x' WHERE digest = ?", (digest_of(results(1)[0][1]),))
    connection.close()
    with open_store(filled) as store:
        store.put_notes({"of another room": b"kept"})
        assert store.mend() == 1
        assert store.note("of another room") == b"kept"
        assert [store.value(k) for k, _, _ in results(200)] == [None] + [v for _, v, _ in results(200)[1:]]
        assert store.past()
        store.put(results(1))
    assert [p.name for p in sorted(filled.iterdir())] == [".store.lock", ".store.sqlite"]


# Versions, locks and folders


def test_a_store_of_a_newer_version_is_left_alone(filled: Path) -> None:
    with sqlite3.connect(file_of(filled)) as connection:
        connection.execute(f"PRAGMA user_version = {STORE_VERSION + 1}")
        connection.execute(f"PRAGMA application_id = {PROGRAM_MARK + STORE_VERSION + 1}")
    connection.close()
    before = file_of(filled).read_bytes()

    for opening in (open_store, read_store):
        with (
            pytest.raises(StoreVersionError, match=r"newer version .store 2, this program knows 1..*--output"),
            opening(filled),
        ):
            pass
    assert file_of(filled).read_bytes() == before


def test_a_version_damaged_by_chance_is_no_newer_version(filled: Path) -> None:
    with sqlite3.connect(file_of(filled)) as connection:
        connection.execute("PRAGMA user_version = 65537")
    connection.close()

    with open_store(filled) as store:
        assert store.value(results(1)[0][0]) is None


HOLDER = """
    import os, sys, time
    from pathlib import Path
    from rateloom.engine import open_store

    with open_store(Path(sys.argv[1])) as store:
        store.put([(b"k" * 20, b"v", b"")])
        print("held", flush=True)
        time.sleep(60)
"""


@pytest.fixture
def holder(folder: Path) -> Iterator["subprocess.Popen[str]"]:
    """Another process that has put a result and holds the store."""
    command = [sys.executable, "-c", textwrap.dedent(HOLDER), str(folder)]
    with subprocess.Popen(command, stdout=subprocess.PIPE, text=True) as process:
        assert process.stdout is not None
        assert process.stdout.readline() == "held\n"
        yield process
        process.kill()


def test_a_second_run_is_told_who_holds_the_store(folder: Path, holder: "subprocess.Popen[str]") -> None:
    with pytest.raises(StoreBusyError, match=f"in use by process {holder.pid} on .*Wait for it"), open_store(folder):
        pass
    with pytest.raises(StoreBusyError, match=f"in use by process {holder.pid} on .*Ask again"), read_store(folder):
        pass


def test_what_a_killed_run_put_is_there(folder: Path, holder: "subprocess.Popen[str]") -> None:
    holder.send_signal(signal.SIGKILL)
    holder.wait()

    with read_store(folder) as store:
        assert store.value(b"k" * 20) == b"v"
    with open_store(folder) as store:
        assert store.value(b"k" * 20) == b"v"


def test_a_file_in_the_place_of_the_folder_is_told(tmp_path: Path) -> None:
    (tmp_path / "out").write_text("", encoding="utf-8")

    with pytest.raises(StoreError, match=r"out cannot be used: .*--output"), open_store(tmp_path / "out"):
        pass


def test_a_folder_in_the_place_of_the_store_is_told(folder: Path) -> None:
    file_of(folder).mkdir(parents=True)

    with pytest.raises(StoreError, match=r"cannot be opened: .*--output"), open_store(folder):
        pass


def test_a_folder_that_cannot_be_written_is_told_and_can_be_read(small_disk: Path) -> None:
    with open_store(small_disk) as store:
        store.put(results(3))
    subprocess.run(["mount", "-o", "remount,ro", str(small_disk)], check=True)

    with pytest.raises(StoreError, match="cannot be used: Read-only file system"), open_store(small_disk):
        pass
    with read_store(small_disk) as store:
        assert store.value(results(1)[0][0]) == results(1)[0][1]


def put_one_by_one(folder: Path, rows: list[tuple[bytes, bytes, bytes]]) -> None:
    with open_store(folder) as store:
        for row in rows:
            store.put([row])


def test_a_full_disk_is_told_and_harms_nothing(small_disk: Path) -> None:
    large = [(digest_of(b"%d" % i), os.urandom(50_000), b"") for i in range(40)]
    with pytest.raises(StoreError, match=r"cannot be written: database or disk is full\. Free some space"):
        put_one_by_one(small_disk, large)

    subprocess.run(["mount", "-o", "remount,size=8m", str(small_disk)], check=True)
    with open_store(small_disk) as store:
        kept = [store.value(key) for key, _, _ in large]
        assert all(found in (value, None) for found, (_, value, _) in zip(kept, large, strict=True))
        assert sum(found is not None for found in kept) > 3
        store.put(large)
        assert [store.value(k) for k, _, _ in large] == [v for _, v, _ in large]


def test_a_folder_removed_under_way_is_told(folder: Path) -> None:
    with open_store(folder) as store:
        store.put(results(1))
        shutil.rmtree(folder)
        with pytest.raises(StoreError, match="was removed or replaced while"):
            store.put(results(2))


def test_reading_makes_no_folder(tmp_path: Path) -> None:
    with read_store(tmp_path / "none") as store:
        assert store.digest(b"k") is None
        assert store.past() == {}
        assert store.remarks([b"k"]) == {}
    assert not (tmp_path / "none").exists()


# Speed


def test_the_index_of_sixty_thousand_results_is_read_in_half_a_second(folder: Path) -> None:
    keys = [digest_of(b"%d" % i) for i in range(60_000)]
    with open_store(folder) as store:
        for begin in range(0, 60_000, 2_000):
            store.put((k, b"%d" % (i + begin) * 60, b"") for i, k in enumerate(keys[begin : begin + 2_000]))

    # In processor time, the best of three, for the machine may be loaded.
    assert min(index_seconds(folder, keys) for _ in range(3)) < 0.5


def index_seconds(folder: Path, keys: list[bytes]) -> float:
    with read_store(folder) as store:
        begun = time.process_time()
        assert all(store.digest(key) for key in keys)
        return time.process_time() - begun
