"""What the user asked for: a job file and its includes, read and checked, as one ``Job``.

Takes the path of a YAML file and gives records in base units with every default resolved, every path absolute and
every entry's place kept, or a ``JobError`` with all problems of all files at once. It opens no output file of a
calculation: one that is missing is found when it is read. Which findings and thresholds exist is told by the caller,
because the audit lies above this room.
"""

from rateloom.job.fields import RATE_UNITS
from rateloom.job.load import load_job
from rateloom.job.model import Entity, FitSettings, FrequencyScale, Given, Job, Place, Reaction
from rateloom.job.schema import job_schema

__all__ = [
    "RATE_UNITS",
    "Entity",
    "FitSettings",
    "FrequencyScale",
    "Given",
    "Job",
    "Place",
    "Reaction",
    "job_schema",
    "load_job",
]
