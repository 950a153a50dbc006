"""How much does the audit cost beside the reading of the outputs?"""

import time
from pathlib import Path

import pytest

from rateloom.batch.graph import graph_of
from rateloom.batch.loading import load
from rateloom.batch.stages import STAGES
from rateloom.engine import Fingerprints, InProcess, build_graph, evaluate, open_store

ROOT = Path(__file__).resolve().parents[2]


@pytest.mark.benchmark
def test_the_audit_costs_less_than_a_tenth_of_reading(tmp_path: Path) -> None:
    """All checks of the demo's audit against the reading of its files, which is cclib's time, in one process."""
    job = load(str(ROOT / "configs" / "cofiring.yaml"), str(tmp_path))
    nodes = graph_of(job, rates=False).nodes
    files = sorted({node.file for node in nodes.values() if node.file is not None})
    spent = dict.fromkeys(STAGES, 0.0)
    last = [time.process_time()]

    def clock(name: str) -> None:
        now = time.process_time()
        spent[nodes[name].stage] += now - last[0]
        last[0] = now

    with open_store(tmp_path) as store:
        workers = InProcess("rateloom.batch.stages:STAGES")
        evaluate(build_graph(nodes.values()), STAGES, store, Fingerprints({}), workers, clock)
    audit = sum(seconds for stage, seconds in spent.items() if stage.startswith("check-"))

    reading = spent["read"]
    reactions = len(job.reactions)
    print(f"\n{reactions} reactions, {len(files)} files: reading {reading:.2f} s, audit {audit:.2f} s of one core")
    print(f"audit / reading = {audit / reading:.3f} ({1e3 * audit / reactions:.1f} ms a reaction)")
    assert audit < 0.1 * reading
