"""Worker processes: one thread each, deaf to the terminal's interrupt, gone with their parent."""

import os
import signal
import subprocess
import sys
import textwrap
import time
from pathlib import Path

import pytest

from rateloom.engine import Task, encode
from rateloom.engine.stage import Done
from rateloom.engine.workers import Processes, run_batch, table_of

TABLE = "toy_stages:STAGES"


@pytest.mark.usefixtures("toys")
def test_a_batch_is_carried_out_in_order() -> None:
    tasks = [Task(f"a{i}", "add", encode({"by": float(i), "mode": ""})) for i in range(3)]

    done = run_batch(TABLE, tasks)

    assert [task.name for task in done] == ["a0", "a1", "a2"]
    assert all(isinstance(task, Done) and task.seconds > 0 for task in done)


@pytest.mark.usefixtures("toys")
def test_linear_algebra_is_held_to_one_thread_in_this_process() -> None:
    from threadpoolctl import threadpool_info  # type: ignore[import-untyped]

    table_of.cache_clear()
    table_of(TABLE)

    assert {pool["num_threads"] for pool in threadpool_info()} <= {1}


PARENT = """
    import sys, time
    from rateloom.engine import Task, encode
    from rateloom.engine.workers import Processes

    workers = Processes("toy_stages:STAGES", 2)
    task = Task("a", "add", encode({"by": 1.0, "mode": "sleep"}))
    workers.submit([task]).result()
    print(*[process.pid for process in workers._executor._processes.values()], flush=True)
    workers.submit([task] * 600)
    time.sleep(60)
"""


def alive(pid: int) -> bool:
    try:
        state = Path(f"/proc/{pid}/stat").read_text(encoding="utf-8").rsplit(")", 1)[1].split()[0]
    except OSError:
        return False
    return state != "Z"


@pytest.mark.skipif(not Path("/proc/self/stat").exists(), reason="processes are looked up in /proc")
@pytest.mark.usefixtures("toys")
def test_no_worker_outlives_a_killed_parent() -> None:
    with subprocess.Popen(
        [sys.executable, "-c", textwrap.dedent(PARENT)], stdout=subprocess.PIPE, text=True, env=os.environ
    ) as parent:
        assert parent.stdout is not None
        pids = [int(word) for word in parent.stdout.readline().split()]
        assert len(pids) == 2
        assert all(alive(pid) for pid in pids)
        parent.send_signal(signal.SIGKILL)
        parent.wait()

    deadline = time.monotonic() + 30
    while any(alive(pid) for pid in pids) and time.monotonic() < deadline:
        time.sleep(0.1)

    assert not any(alive(pid) for pid in pids)


@pytest.mark.usefixtures("toys")
def test_workers_are_deaf_to_the_interrupt_and_have_one_thread() -> None:
    workers = Processes(TABLE, 1)
    try:
        workers.submit([Task("a", "add", encode({"by": 1.0, "mode": ""}))]).result()
        (process,) = workers._executor._processes.values()
        os.kill(process.pid, signal.SIGINT)
        (done,) = workers.submit([Task("b", "add", encode({"by": 2.0, "mode": ""}))]).result()
        environment = workers._executor.submit(os.getenv, "OPENBLAS_NUM_THREADS").result()
    finally:
        workers.close(now=True)

    assert isinstance(done, Done)
    assert environment == "1"
