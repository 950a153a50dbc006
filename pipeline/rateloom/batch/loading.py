"""The job file, loaded against the audit's own tables of codes and limits."""

from rateloom.audit import CODES, LIMITS
from rateloom.job import Job, load_job


def load(path: str, output: str | None = None) -> Job:
    """Load a job file.

    Raises
    ------
    JobError
        The job cannot be used; it holds every problem.
    """
    return load_job(path, output=output, known_codes=frozenset(CODES), known_limits=LIMITS)
