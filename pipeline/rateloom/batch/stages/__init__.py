"""The stages of a job, one module each, and the table that the engine looks them up in."""

from types import MappingProxyType

from rateloom.batch.stages import (
    check_calculations,
    check_job,
    check_rate,
    check_reaction,
    check_saddle,
    fit,
    given,
    partition,
    rate,
    read,
    rows,
    species,
)
from rateloom.batch.stages.check_calculations import CalculationsCheck
from rateloom.batch.stages.check_job import EntryRequest, JobCheck
from rateloom.batch.stages.check_rate import RateCheck
from rateloom.batch.stages.check_reaction import MemberRequest, ReactionCheck
from rateloom.batch.stages.check_saddle import SaddleCheck
from rateloom.batch.stages.fit import FitPair, FitRequest
from rateloom.batch.stages.partition import Grid, Tabulated
from rateloom.batch.stages.rate import RateRequest
from rateloom.batch.stages.read import Reading
from rateloom.batch.stages.rows import ReactionRows, ReactionRowsRequest, SpeciesRows, SpeciesRowsRequest
from rateloom.batch.stages.species import SpeciesRequest
from rateloom.calculation import READER_VERSION
from rateloom.engine import Stage
from rateloom.job import Given

STAGES: MappingProxyType[str, Stage] = MappingProxyType(
    {
        stage.name: stage
        for stage in (
            Stage("read", READER_VERSION, read.read, Reading, read.VALUE, read.unreadable),
            Stage("given", 1, given.take, Given, given.VALUE),
            Stage("species", 1, species.make, SpeciesRequest, species.VALUE),
            Stage("check-calculations", 1, check_calculations.check, CalculationsCheck, check_calculations.VALUE),
            Stage("check-saddle", 2, check_saddle.check, SaddleCheck, check_saddle.VALUE),
            Stage("check-reaction", 1, check_reaction.check, ReactionCheck, check_reaction.VALUE),
            Stage("check-job", 1, check_job.check, JobCheck, check_job.VALUE),
            Stage("partition", 1, partition.tabulate, Grid, partition.VALUE),
            Stage("rate", 2, rate.evaluate, RateRequest, rate.VALUE),
            Stage("fit", 1, fit.fit, FitRequest, fit.VALUE),
            Stage("check-rate", 1, check_rate.check, RateCheck, check_rate.VALUE),
            Stage("species-rows", 1, rows.write_species, SpeciesRowsRequest, SpeciesRows),
            Stage("reaction-rows", 1, rows.write_reaction, ReactionRowsRequest, ReactionRows),
        )
    }
)
"""By name, in the order of the work."""

__all__ = [
    "STAGES",
    "CalculationsCheck",
    "EntryRequest",
    "FitPair",
    "FitRequest",
    "Grid",
    "JobCheck",
    "MemberRequest",
    "RateCheck",
    "RateRequest",
    "ReactionCheck",
    "ReactionRows",
    "ReactionRowsRequest",
    "Reading",
    "SaddleCheck",
    "SpeciesRequest",
    "SpeciesRows",
    "SpeciesRowsRequest",
    "Tabulated",
]
