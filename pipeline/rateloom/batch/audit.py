"""Auditing a batch: read and check, without rates and without touching the tables."""

from pathlib import Path

from rateloom.audit import Finding
from rateloom.batch.evaluation import DEFAULT_LIMITS, FileLimits, Progress, bring_up_to_date, crew
from rateloom.batch.graph import WHOLE_JOB, graph_of
from rateloom.batch.loading import load
from rateloom.batch.verdict import verdict_of
from rateloom.engine import open_store


def audit_job(
    path: str,
    *,
    output: str | None = None,
    workers: int = 1,
    scheduler: str | None = None,
    limits: FileLimits = DEFAULT_LIMITS,
    sieve: bool = True,
    progress: Progress,
) -> tuple[Finding, ...]:
    """Check every calculation, species and reaction of a job.

    Parameters
    ----------
    path
        The job file.
    output
        Another output folder than the job names; only its store is used.
    workers
        Processes to compute with.
    scheduler
        Address of a Dask scheduler whose workers compute instead.
    limits
        Of time and size, beyond which a file counts as unreadable.
    sieve
        Whether lines at which nothing needed begins are kept from cclib.
    progress
        Called after each node.

    Returns
    -------
    tuple of Finding
        Gravest first.

    Raises
    ------
    JobError, StoreError, ClusterError
        The job, the store or the cluster cannot be used.
    """
    job = load(path, output)
    graph = graph_of(job, rates=False, sieve=sieve)
    with open_store(Path(job.output)) as store:
        evaluated = bring_up_to_date(
            graph,
            store,
            workers=crew(graph.nodes, store, workers, scheduler),
            wanted=(WHOLE_JOB,),
            limits=limits,
            progress=progress,
        )
        return verdict_of(job, evaluated.remarks(), {}).findings
