"""What a run would compute, and why, without computing it.

Stages that are out of date for certain are told from those that follow only if what comes before them gives
something new.
"""

from dataclasses import dataclass
from pathlib import Path

import networkx as nx

from rateloom.batch.graph import graph_of
from rateloom.batch.loading import load
from rateloom.batch.stages import STAGES
from rateloom.engine import Fingerprints, Reason, Schedule, Status, build_graph, read_store


@dataclass(frozen=True, slots=True)
class Plan:
    """What a run would do."""

    certain: tuple[Reason, ...]
    """Nodes that are out of date, in order of name."""
    possible: tuple[str, ...]
    """Nodes that follow them if they give something new."""
    reused: int
    """How many nodes are up to date."""

    def text(self) -> str:
        """Write the plan for a person."""
        if not self.certain:
            return f"Nothing to compute: all {self.reused} stages are up to date."
        lines = [f"To compute ({len(self.certain)}):"]
        for reason in self.certain:
            sources = f" ({', '.join(reason.sources)})" if reason.sources else ""
            lines.append(f"  {reason.node}: {reason.why}{sources}")
        if self.possible:
            lines.append(f"And, where these give something new ({len(self.possible)}):")
            lines += [f"  {name}" for name in self.possible]
        lines.append(f"Up to date: {self.reused}")
        return "\n".join(lines)


def plan_job(path: str, *, output: str | None = None) -> Plan:
    """Say what ``run`` would compute for a job.

    Raises
    ------
    JobError, StoreError
        The job or the store cannot be used.
    """
    job = load(path, output)
    graph = build_graph(graph_of(job).nodes.values())
    with read_store(Path(job.output)) as store:
        files = Fingerprints(store.files())
        schedule = Schedule(
            graph,
            STAGES,
            known=store.digest,
            past=store.past(),
            file_digest=lambda name: files[name].digest,
            file_size=lambda name: files[name].size,
        )
    certain = tuple(schedule.reasons[name] for name in sorted(schedule.reasons))
    following: set[str] = set()
    for reason in certain:
        following |= nx.descendants(graph, reason.node)
    reused = sum(status is Status.REUSED for status in schedule.status.values())
    return Plan(certain, tuple(sorted(following - set(schedule.reasons))), reused)
