"""Evaluating the graph of a job and gathering what its stages remarked."""

from collections import Counter
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, replace
from typing import Any

from rateloom.batch.graph import WHOLE_JOB, JobGraph
from rateloom.batch.stages import STAGES
from rateloom.engine import Cluster, Evaluation, Fingerprints, Node, Status, Store, build_graph, decode, evaluate
from rateloom.engine.files import LARGEST_FILE
from rateloom.engine.workers import InProcess, Processes, Workers
from rateloom.remarks import Remark

STAGE_TABLE = "rateloom.batch.stages:STAGES"
FEW = 8
"""Below this many files to read, starting worker processes costs more time than it saves."""

Progress = Callable[[int, int, str], None]
"""Called with nodes done, nodes in all and the name of the last one."""


@dataclass(frozen=True, slots=True)
class FileLimits:
    """What reading one file may take; beyond that the file counts as unreadable, until a run allows more."""

    seconds: float = 600.0
    largest: int = LARGEST_FILE
    """[bytes], as it is and unpacked."""


DEFAULT_LIMITS = FileLimits()


@dataclass(frozen=True, slots=True)
class Evaluated:
    """A graph brought up to date."""

    graph: JobGraph
    evaluation: Evaluation
    store: Store
    files: Fingerprints

    def value(self, node: str) -> Any:
        """Load the value of a node; None where it has none."""
        kind = STAGES[self.graph.nodes[node].stage].value | None
        data = self.store.value(self.evaluation.keys[node])
        return None if data is None else decode(data, kind)

    def remarks(self) -> dict[tuple[str, str], list[Remark]]:
        """Gather the remarks about each subject, with the file they come from."""
        keys = self.evaluation.keys
        encoded = self.store.remarks(keys[node] for node in self.graph.nodes if node in keys)
        faults = {fault.node: fault.detail for fault in self.evaluation.faults}
        gathered: dict[tuple[str, str], list[Remark]] = {}
        for subject, sources in self.graph.sources.items():
            found = gathered.setdefault(subject, [])
            for source in sources:
                data = encoded.get(keys[source.node])
                if source.node in faults:
                    found.append(Remark("program-fault", f"{source.node}: {faults[source.node]}"))
                elif data is not None:
                    remarks: tuple[Remark, ...] = decode(data, tuple[Remark, ...])
                    found += [replace(r, message=source.words + r.message) if source.words else r for r in remarks]
        for subject, remark in self.value(WHOLE_JOB) or ():
            gathered.setdefault((subject.kind, subject.name), []).append(remark)
        return gathered

    def counts(self) -> tuple[dict[str, int], dict[str, int]]:
        """Count the nodes of each stage that were computed and that were reused."""
        tally = Counter((self.graph.nodes[name].stage, status) for name, status in self.evaluation.status.items())
        computed = {stage: tally[stage, Status.COMPUTED] + tally[stage, Status.FAULTY] for stage in STAGES}
        return computed, {stage: tally[stage, Status.REUSED] for stage in STAGES}


def bring_up_to_date(
    graph: JobGraph,
    store: Store,
    *,
    workers: Workers,
    wanted: Iterable[str],
    limits: FileLimits,
    progress: Progress,
) -> Evaluated:
    """Evaluate the graph of a job.

    Parameters
    ----------
    graph
        Of the job.
    store
        Open for writing.
    workers
        Where stages are carried out; they are let go at the end.
    wanted
        Nodes whose values will be read.
    limits
        Of time and size of each file.
    progress
        Told of every node.
    """
    files = Fingerprints(store.files(), limits.largest)
    done = [0]

    def count(name: str) -> None:
        done[0] += 1
        progress(done[0], len(graph.nodes), name)

    try:
        evaluation = evaluate(
            build_graph(graph.nodes.values()),
            STAGES,
            store,
            files,
            workers,
            count,
            wanted=wanted,
            seconds_per_file=limits.seconds,
            largest_file=limits.largest,
        )
    except BaseException:
        workers.close(now=True)
        raise
    workers.close(now=False)
    return Evaluated(graph, evaluation, store, files)


def crew(nodes: Mapping[str, Node], store: Store, count: int, scheduler: str | None = None) -> Workers:
    """Choose where stages are carried out: on a cluster if asked, in this process where there is little to do."""
    if scheduler is not None:
        return Cluster(scheduler, STAGE_TABLE)
    past, known = store.past(), store.files()
    if any(result.faulty for result in past.values()):
        # It may have taken its process along: not this one.
        return Processes(STAGE_TABLE, count)
    unread = sum(node.file is not None and node.file not in known for node in nodes.values())
    if count == 1 or (past and unread < FEW):
        return InProcess(STAGE_TABLE)
    return Processes(STAGE_TABLE, count)
