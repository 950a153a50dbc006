"""A batch: the job as a graph of stages, evaluated, audited and written as tables.

Takes the path of a job file; gives the output folder and a summary. This is where the rooms meet: the physics rooms
know nothing of each other's order, the engine nothing of chemistry. Its names are loaded when they are asked for:
a run over unchanged input needs no physics.
"""

from typing import TYPE_CHECKING

from rateloom.lazy import loader

if TYPE_CHECKING:
    from rateloom.batch.audit import audit_job
    from rateloom.batch.evaluation import FileLimits
    from rateloom.batch.plan import Plan, plan_job
    from rateloom.batch.run import run_job
    from rateloom.batch.summary import Summary
    from rateloom.batch.unchanged import unchanged_run

__all__ = ["FileLimits", "Plan", "Summary", "audit_job", "plan_job", "run_job", "unchanged_run"]

__getattr__ = loader(
    __name__,
    {
        "audit": ("audit_job",),
        "evaluation": ("FileLimits",),
        "plan": ("Plan", "plan_job"),
        "run": ("run_job",),
        "summary": ("Summary",),
        "unchanged": ("unchanged_run",),
    },
)
