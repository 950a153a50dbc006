"""A batch: the job as a graph of stages, evaluated, audited and written as tables.

Takes the path of a job file; gives the output folder and a summary. This is where the rooms meet: the physics rooms
know nothing of each other's order, the engine nothing of chemistry.
"""

from rateloom.batch.audit import audit_job
from rateloom.batch.plan import Plan, plan_job
from rateloom.batch.run import run_job
from rateloom.batch.summary import Summary

__all__ = ["Plan", "Summary", "audit_job", "plan_job", "run_job"]
