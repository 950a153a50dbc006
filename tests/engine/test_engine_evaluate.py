"""What is computed, what is not, and what is kept whatever happens."""

import os
import sqlite3
import time
from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from rateloom.engine import STORE_NAME, Evaluation, Stage, Status, decode, digest_of, open_store
from rateloom.engine.workers import InProcess, Processes
from rateloom.errors import StoreError
from rateloom.remarks import Remark

if TYPE_CHECKING:
    from toy_job import Toy

Computed = Callable[[Evaluation], list[str]]
TABLE = "toy_stages:STAGES"


def remarks_of(toy: "Toy", evaluation: Evaluation, name: str) -> list[Remark]:
    with open_store(toy.output) as store:
        found = store.remarks([evaluation.keys[name]])
    return decode(found[evaluation.keys[name]], list[Remark]) if found else []


# Nothing twice


def test_a_first_run_computes_all_and_a_second_nothing(toy: "Toy", computed: Computed) -> None:
    toy.chain(4)
    first = toy.run()
    assert len(computed(first)) == 8
    assert toy.value(first, "total") == [2 * (0 + 1 + 2 + 3) - 0 - 3 + 6 * 0.5]
    toy.diary()

    second = toy.run()

    assert computed(second) == []
    assert second.digests == first.digests
    assert toy.diary() == []


def test_a_changed_file_recomputes_its_dependants_alone(toy: "Toy", computed: Computed) -> None:
    toy.chain(5)
    toy.run()

    toy.write("4.txt", "7")
    after = toy.run()

    assert computed(after) == ["pair 3", "read 4", "total"]
    assert [after.reasons[n].why for n in ("read 4", "pair 3", "total")] == ["file changed", *["input changed"] * 2]
    assert after.reasons["total"].sources == ("pair 3",)


def test_an_equal_result_stops_the_wave(toy: "Toy", computed: Computed) -> None:
    toy.chain(4)
    toy.run()

    toy.write("2.txt", "2.0000001 0.5")  # read to three decimals
    after = toy.run()

    assert computed(after) == ["read 2"]


def test_a_file_that_was_only_touched_wakes_nothing(toy: "Toy", computed: Computed) -> None:
    toy.chain(2)
    toy.run()

    os.utime(toy.folder / "0.txt", (1, 1))

    assert computed(toy.run()) == []


def test_changed_settings_and_a_raised_version_wake_their_stage(toy: "Toy", computed: Computed) -> None:
    toy.chain(3)
    toy.run()
    toy.add("pair 1", ("read 1", "read 2"), by=0.25)
    settings = toy.run()
    assert computed(settings) == ["pair 1", "total"]
    assert settings.reasons["pair 1"].why == "settings changed"

    add = toy.stages["add"]
    toy.stages["add"] = Stage("add", add.version + 1, add.compute, add.parameters, add.value)
    version = toy.run()

    assert computed(version) == ["pair 0", "pair 1", "total"]
    assert version.reasons["pair 0"].why == "method changed"


def test_going_back_to_former_settings_finds_their_results(toy: "Toy", computed: Computed) -> None:
    toy.chain(2)
    toy.run()
    toy.add("total", ["pair 0"], by=1.0)
    toy.run()
    toy.add("total", ["pair 0"])

    assert computed(toy.run()) == []


def test_equal_nodes_are_computed_once(toy: "Toy") -> None:
    toy.chain(2)
    for i in range(20):
        toy.add(f"twin {i}", ["read 0", "read 1"], by=3.0)

    evaluation = toy.run()

    assert toy.diary().count("add 3") == 1
    assert len({evaluation.digests[f"twin {i}"] for i in range(20)}) == 1


def test_the_folder_of_a_file_is_of_no_account_but_its_name_is(toy: "Toy", computed: Computed) -> None:
    toy.chain(2)
    toy.run()
    moved = toy.folder / "moved"
    moved.mkdir()
    (toy.folder / "0.txt").rename(moved / "0.txt")
    (toy.folder / "1.txt").rename(moved / "one.txt")
    toy.read("read 0", moved / "0.txt")
    toy.read("read 1", moved / "one.txt")

    assert computed(toy.run()) == ["read 1"]


def test_any_number_of_workers_gives_the_same_bytes(toy: "Toy") -> None:
    toy.chain(30)
    outcomes = []
    for count in (0, 1, 3):
        toy.output = toy.folder / f"out {count}"
        evaluation = toy.run(Processes(TABLE, count) if count else InProcess(TABLE))
        with sqlite3.connect(toy.output / ".store.sqlite") as connection:
            rows = connection.execute("SELECT * FROM results ORDER BY key").fetchall()
            values = connection.execute("SELECT * FROM contents ORDER BY digest").fetchall()
        connection.close()
        outcomes.append((evaluation.digests, evaluation.keys, evaluation.status, rows, values))

    assert outcomes[0] == outcomes[1] == outcomes[2]
    assert len(outcomes[0][3]) == 60


def test_progress_names_every_node_that_was_computed(toy: "Toy", computed: Computed) -> None:
    toy.chain(3)
    names: list[str] = []

    assert sorted(names) == []
    assert computed(toy.run(progress=names.append)) == sorted(names)


# Interruption


def interrupt_after(count: int) -> Callable[[str], None]:
    left = [count]

    def progress(_: str) -> None:
        left[0] -= 1
        if left[0] <= 0:
            raise KeyboardInterrupt

    return progress


@pytest.mark.parametrize("workers", [0, 2])
def test_an_interrupted_run_keeps_what_was_finished(toy: "Toy", workers: int) -> None:
    toy.chain(12)
    with pytest.raises(KeyboardInterrupt):
        toy.run(Processes(TABLE, workers) if workers else None, progress=interrupt_after(5))
    before = toy.diary()
    assert 5 <= len(before) < 24

    toy.run()
    after = toy.diary()

    assert len(before) + len(after) <= 24 + workers  # at most one a worker was under way
    assert {line for line in before if line.startswith("read")}.isdisjoint(after) or workers


def test_an_interrupt_inside_a_stage_keeps_the_others(toy: "Toy", monkeypatch: pytest.MonkeyPatch) -> None:
    import toy_stages

    toy.chain(6)
    seen: list[str] = []
    original = toy_stages.diary

    def interrupted(line: str) -> None:
        seen.append(line)
        if len(seen) == 4:
            raise KeyboardInterrupt
        original(line)

    monkeypatch.setattr(toy_stages, "diary", interrupted)
    with pytest.raises(KeyboardInterrupt):
        toy.run()
    monkeypatch.undo()

    with open_store(toy.output) as store:
        assert sum(store.digest(p.key) is not None for p in store.past().values()) == 3


# Faults


@pytest.mark.parametrize(
    ("mode", "detail"),
    [
        ("raise", "ValueError: no such luck at toy_stages.py:"),
        ("exit", "SystemExit: 3 at "),
        ("memory", "Out of memory"),
    ],
)
@pytest.mark.parametrize("workers", [0, 2])
def test_a_stage_that_raises_spoils_its_dependants_alone(toy: "Toy", mode: str, detail: str, workers: int) -> None:
    toy.chain(4)
    toy.add("bad", ["read 0"], mode=mode)
    toy.add("after", ["bad"])

    evaluation = toy.run(Processes(TABLE, workers) if workers else None)

    assert [fault.node for fault in evaluation.faults] == ["bad"]
    assert detail in evaluation.faults[0].detail
    assert {n for n, s in evaluation.status.items() if s is not Status.COMPUTED} == {"bad"}
    assert evaluation.status["bad"] is Status.FAULTY
    assert toy.value(evaluation, "after") is None
    assert remarks_of(toy, evaluation, "after") == [Remark("missing", "an input is missing")]
    assert toy.value(evaluation, "total") is not None


def test_a_fault_is_not_kept_and_the_next_run_tries_again(toy: "Toy", computed: Computed) -> None:
    toy.chain(2)
    toy.add("ill", ["read 0"], mode="ill once")
    toy.add("after", ["ill"])
    first = toy.run()
    assert [f.node for f in first.faults] == ["ill"]

    second = toy.run()

    assert second.faults == []
    assert computed(second) == ["after", "ill"]
    assert second.reasons["ill"].why == "failed before"
    assert toy.value(second, "after") == [0.5]
    assert computed(toy.run()) == []


def test_twins_of_a_faulty_node_are_faulty(toy: "Toy") -> None:
    for i in range(3):
        toy.add(f"bad {i}", mode="raise")

    evaluation = toy.run(Processes(TABLE, 2))

    assert [fault.node for fault in evaluation.faults] == ["bad 0", "bad 1", "bad 2"]


def test_a_worker_killed_once_is_survived(toy: "Toy") -> None:
    toy.chain(10)
    toy.add("fragile", ["read 0"], mode="die once")

    evaluation = toy.run(Processes(TABLE, 2))

    assert evaluation.faults == []
    assert set(evaluation.status.values()) == {Status.COMPUTED}


def test_a_stage_that_kills_workers_twice_is_named_and_the_others_are_unharmed(toy: "Toy") -> None:
    toy.chain(10)
    toy.add("killer", ["read 0"], mode="die")
    toy.add("after", ["killer"])

    evaluation = toy.run(Processes(TABLE, 2))

    assert [fault.node for fault in evaluation.faults] == ["killer"]
    assert "2 workers died over it (out of memory?)" in evaluation.faults[0].detail
    assert len([line for line in toy.diary() if line.startswith("died")]) == 2
    assert {n for n, s in evaluation.status.items() if s is not Status.COMPUTED} == {"killer"}


@pytest.mark.long
def test_two_killers_are_both_named(toy: "Toy") -> None:
    toy.chain(6)
    toy.add("killer 1", ["read 0"], mode="die")
    toy.add("killer 2", ["read 1"], mode="die")

    evaluation = toy.run(Processes(TABLE, 2))

    assert [fault.node for fault in evaluation.faults] == ["killer 1", "killer 2"]
    assert evaluation.status["total"] is Status.COMPUTED


# Files


def test_a_missing_file_is_told_and_read_once_it_is_there(toy: "Toy", computed: Computed) -> None:
    toy.chain(3)
    (toy.folder / "1.txt").unlink()
    first = toy.run()
    assert toy.value(first, "total") is None
    assert remarks_of(toy, first, "read 1") == [Remark("not-read", "No such file or directory")]
    assert computed(toy.run()) == []

    toy.write("1.txt", "1 0.5")
    second = toy.run()

    assert computed(second) == ["pair 0", "pair 1", "read 1", "total"]
    assert second.reasons["read 1"].why == "file not read before"


class Restless(InProcess):
    """Changes a file just before it is read, so many times."""

    def __init__(self, path: Path, contents: list[str | None]) -> None:
        super().__init__(TABLE)
        self.path = path
        self.contents = contents

    def submit(self, tasks):  # type: ignore[no-untyped-def]
        if self.contents and any(task.file == str(self.path) for task in tasks):
            content = self.contents.pop(0)
            if content is None:
                self.path.unlink()
            else:
                self.path.write_text(content, encoding="utf-8")
        return super().submit(tasks)


def test_a_file_changed_while_it_is_read_is_read_again(toy: "Toy") -> None:
    toy.chain(2)

    evaluation = toy.run(Restless(toy.folder / "1.txt", ["5", "6", "7"]))

    assert toy.value(evaluation, "read 1") == [7.0]
    assert evaluation.digests == toy.run().digests


def test_a_file_that_keeps_changing_is_given_up_until_the_next_run(toy: "Toy", computed: Computed) -> None:
    toy.chain(2)
    first = toy.run(Restless(toy.folder / "1.txt", [str(i) for i in range(4)]))
    assert toy.value(first, "read 1") is None
    assert remarks_of(toy, first, "read 1") == [Remark("not-read", "it keeps changing while it is being read")]
    assert first.faults == []

    second = toy.run()

    assert toy.value(second, "read 1") == [3.0]
    assert "read 1" in computed(second)


def test_a_file_removed_just_before_it_is_read_is_a_missing_file(toy: "Toy") -> None:
    toy.chain(2)

    evaluation = toy.run(Restless(toy.folder / "1.txt", [None]))

    assert remarks_of(toy, evaluation, "read 1") == [Remark("not-read", "No such file or directory")]
    assert evaluation.digests == toy.run().digests


def test_two_stages_that_read_one_file_see_the_same_content(toy: "Toy") -> None:
    toy.chain(2)
    path = toy.folder / "1.txt"
    toy.read("again", path, by=10.0)
    toy.add("early", ["again"])

    class LateChange(Restless):
        def submit(self, tasks):  # type: ignore[no-untyped-def]
            hit = [t for t in tasks if t.file == str(path)]
            if hit and not self.contents:
                path.write_text("9", encoding="utf-8")
            elif hit:
                self.contents.pop()
            return InProcess.submit(self, tasks)

    evaluation = toy.run(LateChange(path, ["first is left alone"]))

    assert toy.value(evaluation, "read 1") == [9.0]
    assert toy.value(evaluation, "again") == [19.0]
    assert toy.value(evaluation, "early") == [19.0]


class Blind(InProcess):
    """A worker on a machine without the files."""

    brought = 0

    def submit(self, tasks):  # type: ignore[no-untyped-def]
        self.brought += sum(task.file_data is not None for task in tasks)
        here = Path.read_bytes
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(Path, "read_bytes", lambda p: here(p.with_name("not here") if p.suffix == ".txt" else p))
            return super().submit(tasks)


def test_files_are_brought_to_a_worker_that_cannot_see_them(toy: "Toy") -> None:
    toy.chain(6)
    blind = Blind(TABLE)

    evaluation = toy.run(blind)

    assert evaluation.faults == []
    assert blind.brought == 6
    toy.output = toy.folder / "other"
    assert evaluation.digests == toy.run().digests


def test_what_unpacks_to_more_than_the_limit_is_given_up_until_a_run_allows_more(
    toy: "Toy", computed: Computed
) -> None:
    toy.chain(2)

    first = toy.run(largest_file=1)

    assert "is larger than 1 bytes" in remarks_of(toy, first, "read 0")[0].message
    assert not first.faults
    assert {"read 0", "read 1"} <= set(computed(toy.run()))


@pytest.mark.parametrize("workers", [0, 2])
def test_a_stage_that_takes_too_long_over_a_file_is_stopped(toy: "Toy", workers: int) -> None:
    toy.chain(2)
    toy.read("slow", toy.folder / "0.txt", mode="hang")
    begun = time.monotonic()

    evaluation = toy.run(Processes(TABLE, workers) if workers else None, seconds_per_file=0.3)

    assert time.monotonic() - begun < 30
    remark = remarks_of(toy, evaluation, "slow")[0]
    assert remark.message.startswith("Reading took longer than 0.3 s. Allow more with --seconds-per-file")
    toy.read("slow", toy.folder / "0.txt", by=1.0)
    assert toy.value(toy.run(), "slow") is not None


# Damage and disks


def damage(toy: "Toy", evaluation: Evaluation, *names: str) -> None:
    with sqlite3.connect(toy.output / ".store.sqlite") as connection:
        for name in names:
            connection.execute(
                "UPDATE contents SET value = zeroblob(9) WHERE digest = ?", (evaluation.digests[name],)
            )
    connection.close()


def test_a_damaged_input_is_computed_again(toy: "Toy", computed: Computed) -> None:
    toy.chain(6)
    first = toy.run()
    damage(toy, first, "read 0", "read 3", "pair 2", "pair 3")

    toy.add("new", ["pair 2", "read 0"])
    second = toy.run()

    assert {"new", "read 0", "read 3", "pair 2", "pair 3"} >= set(computed(second)) >= {"new", "read 0", "pair 2"}
    assert second.digests["total"] == first.digests["total"]
    assert second.reasons["pair 2"].why == "result lost"
    assert all(toy.value(second, name) for name in toy.nodes)


def test_a_damaged_value_that_the_caller_wants_is_computed_again(toy: "Toy", computed: Computed) -> None:
    toy.chain(3)
    first = toy.run()
    damage(toy, first, "total", "pair 1")
    assert computed(toy.run()) == []

    second = toy.run(wanted=["total", "pair 1", "read 0"])

    assert set(computed(second)) >= {"total", "pair 1"}
    assert toy.value(second, "total") == [3 + 3 * 0.5 - 0 + 0.5 + 0 + 1]


def test_no_remark_is_forgotten_behind_a_damaged_page_of_results_no_longer_used(toy: "Toy") -> None:
    toy.read("empty", toy.write("empty.txt", ""))
    toy.run()
    with open_store(toy.output) as store:
        # They sort before all others, so that the first page holds nothing else.
        store.put((b"\x00stale result %06d" % i, b"\xc0", b"") for i in range(300))
    path = toy.output / STORE_NAME
    data = bytearray(path.read_bytes())
    data[data.index(b"\x00stale result 000005") // 4096 * 4096] = 0xFF  # the kind of the page
    path.write_bytes(data)

    evaluation = toy.run()

    assert remarks_of(toy, evaluation, "empty") == [Remark("empty", "no numbers")]


def test_a_wanted_node_that_is_faulty_ends_the_run(toy: "Toy") -> None:
    toy.add("bad", mode="raise")

    assert toy.run(wanted=["bad"]).status == {"bad": Status.FAULTY}


def test_a_disk_that_damages_all_that_is_written_is_told(toy: "Toy", monkeypatch: pytest.MonkeyPatch) -> None:
    toy.chain(2)
    from rateloom.engine import Store

    monkeypatch.setattr(Store, "_content", lambda _self, _digest: None)

    with pytest.raises(StoreError, match=r"damaged again and again while in use\. Check the disk"):
        toy.run()


def test_a_full_disk_stops_the_run_and_keeps_the_rest(toy: "Toy", small_disk: Path) -> None:
    toy.output = small_disk
    for i in range(12):
        toy.write(f"{i}.txt", " ".join(str(j * (i + 1) / 1000) for j in range(15_000)))
        toy.read(f"read {i}", toy.folder / f"{i}.txt")

    with pytest.raises(StoreError, match="database or disk is full"):
        toy.run()

    with open_store(small_disk) as store:
        assert store.digest(b"k") is None


def test_an_output_folder_removed_under_way_is_told(toy: "Toy") -> None:
    import shutil

    toy.chain(3)

    with pytest.raises(StoreError, match="was removed or replaced"):
        toy.run(progress=lambda _: shutil.rmtree(toy.output, ignore_errors=True))


def test_the_value_of_a_task_has_the_digest_that_is_handed_on(toy: "Toy") -> None:
    toy.chain(2)
    evaluation = toy.run()
    with open_store(toy.output) as store:
        value = store.value(evaluation.keys["total"])

    assert value is not None
    assert digest_of(value) == evaluation.digests["total"]
