"""Small stages travel together, long ones alone, and nobody goes without."""

from rateloom.engine.pace import BATCH_MOST, BatchSize, Pace


def size_of(pace: Pace, ready: int, count: int) -> int:
    size, taken = BatchSize(pace, ready, count), 0
    while not size.full:
        size.add("stage")
        taken += 1
    return taken


def test_quick_stages_fill_a_batch() -> None:
    pace = Pace()
    pace.note("stage", 1e-5)

    assert size_of(pace, 10_000, 4) == BATCH_MOST


def test_a_long_stage_goes_alone() -> None:
    pace = Pace()
    pace.note("stage", 5.0)

    assert size_of(pace, 10_000, 4) == 1


def test_few_ready_stages_are_shared_out() -> None:
    pace = Pace()
    pace.note("stage", 1e-5)

    assert size_of(pace, 8, 4) == 2
    assert size_of(pace, 3, 4) == 1
    assert size_of(pace, 0, 4) == 0


def test_recent_times_count_most() -> None:
    pace = Pace()
    pace.note("stage", 1.0)
    for _ in range(60):
        pace.note("stage", 0.001)

    assert 0.001 < pace.expected("stage") < 0.01
