"""Running a batch: evaluate the graph of a job, audit it, write the tables."""

import time
from collections import Counter
from collections.abc import Iterable, Mapping
from dataclasses import replace
from pathlib import Path

from rateloom.audit import SEVERITIES, Finding
from rateloom.batch.evaluation import DEFAULT_LIMITS, Evaluated, FileLimits, Progress, bring_up_to_date, crew
from rateloom.batch.graph import WHOLE_JOB, graph_of
from rateloom.batch.loading import load
from rateloom.batch.stages import ReactionRows, SpeciesRows
from rateloom.batch.summary import Summary
from rateloom.batch.unchanged import LastRun, program_state, remember_run
from rateloom.batch.verdict import Verdict, verdict_of
from rateloom.engine import Fingerprints, Status, open_store
from rateloom.job import Job
from rateloom.output import changes_table, findings_table, provenance, read_file, table, write_files


def run_job(
    path: str,
    *,
    output: str | None = None,
    workers: int = 1,
    scheduler: str | None = None,
    limits: FileLimits = DEFAULT_LIMITS,
    sieve: bool = True,
    progress: Progress,
) -> Summary:
    """Bring the output folder of a job up to date.

    Parameters
    ----------
    path
        The job file.
    output
        Another output folder than the job names.
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
    Summary
        What was delivered and what was computed.

    Raises
    ------
    JobError, StoreError, OutputError, ClusterError
        The job, the store, the folder or the cluster cannot be used.
    """
    begun = time.monotonic()
    job = load(path, output)
    graph = graph_of(job, sieve=sieve)
    folder = Path(job.output)
    with open_store(folder) as store:
        known_before = set(store.past())
        wanted = (WHOLE_JOB, *graph.species_rows.values(), *graph.reaction_rows.values())
        evaluated = bring_up_to_date(
            graph,
            store,
            workers=crew(graph.nodes, store, workers, scheduler),
            wanted=wanted,
            limits=limits,
            progress=progress,
        )
        rows = {name: evaluated.value(node) for name, node in graph.reaction_rows.items()}
        missing = {name: value is None for name, value in rows.items()}
        verdict = verdict_of(job, evaluated.remarks(), missing)
        tables = _tables(job, evaluated, verdict, rows)
        tables["run.json"] = _provenance(job, evaluated, *evaluated.counts())
        changes = changes_table(read_file(folder, "rates.csv"), tables["rates.csv"])
        # What changed goes first: once the new rates stand there, nobody can tell any more.
        tables = {"changes.csv": changes, **tables}
        write_files(folder, tables)
        store.keep_only(set(evaluated.evaluation.keys.values()))
        summary = _summary(job, evaluated, verdict, known_before)
        if not summary.faults:
            remember_run(store, folder, _last_run(job, evaluated, tables, summary))
    return replace(summary, seconds=time.monotonic() - begun)


def _provenance(job: Job, evaluated: Evaluated, computed: Mapping[str, int], reused: Mapping[str, int]) -> bytes:
    hashes = {path: state.sha256 for path, state in evaluated.files.states.items()}
    return provenance(job.title, job.path, hashes, computed, reused)


def _summary(job: Job, evaluated: Evaluated, verdict: Verdict, known_before: set[str]) -> Summary:
    computed, reused = evaluated.counts()
    status = evaluated.evaluation.status
    return Summary(
        title=job.title,
        output=job.output,
        delivered=len(job.reactions) - len(verdict.withheld),
        withheld=verdict.withheld,
        findings=count_findings(verdict.findings),
        computed=computed,
        reused=reused,
        renewed=tuple(sorted(n for n in known_before & set(status) if status[n] is Status.COMPUTED)),
        faults=tuple(f"{fault.node}: {fault.detail}" for fault in evaluated.evaluation.faults),
    )


def _last_run(job: Job, evaluated: Evaluated, tables: Mapping[str, bytes], summary: Summary) -> LastRun:
    """Say what the next run is to find unchanged, and what it then writes."""
    nothing = dict.fromkeys(summary.computed, 0)
    everything = {stage: count + summary.reused[stage] for stage, count in summary.computed.items()}
    now = {
        "run.json": _provenance(job, evaluated, nothing, everything),
        "changes.csv": changes_table(None, tables["rates.csv"]),
    }
    job_files = Fingerprints({})
    return LastRun(
        program=program_state(),
        job=job.path,
        files=evaluated.files.states | {path: job_files[path] for path in job.files},
        tables={name: (0, 0, 0) for name in tables if name not in now},
        summary=replace(summary, computed=nothing, reused=everything, renewed=()),
        now=now,
    )


def _tables(job: Job, evaluated: Evaluated, verdict: Verdict, rows: dict[str, object]) -> dict[str, bytes]:
    """Put together the tables of what is delivered, in the order of the job file."""
    delivered = [
        value for name, value in rows.items() if isinstance(value, ReactionRows) and name not in verdict.withheld
    ]
    species = [
        value
        for entity in job.species
        if entity.name not in verdict.withheld_species
        and isinstance(value := evaluated.value(evaluated.graph.species_rows[entity.name]), SpeciesRows)
    ]
    return {
        "rates.csv": table("rates.csv", (value.rates for value in delivered)),
        "arrhenius.csv": table("arrhenius.csv", (value.arrhenius for value in delivered)),
        "species.csv": table("species.csv", (value.species for value in species)),
        "equilibrium.csv": table("equilibrium.csv", (value.equilibrium for value in delivered)),
        "audit.csv": findings_table(verdict.findings),
    }


def count_findings(findings: Iterable[Finding]) -> dict[str, int]:
    """Count findings by severity, those that the job file accepts apart."""
    tally = Counter("accepted" if finding.accepted_because else finding.severity for finding in findings)
    return {severity: tally[severity] for severity in (*SEVERITIES, "accepted")}
