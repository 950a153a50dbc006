"""The audit: findings about every calculation, species, saddle, reaction, rate and fit, with their evidence.

Takes records of the rooms below; gives ``Remark`` values, and makes findings of all remarks of a batch: with a
subject, a severity, and the reason for which the job file accepts one. Writes no file and computes no rate.
"""

from rateloom.audit.calculation import calculation_remarks
from rateloom.audit.codes import CODES, SEVERITIES
from rateloom.audit.findings import (
    Finding,
    Subject,
    check_codes,
    fails,
    judge,
    unmatched_accepts,
    withholding,
)
from rateloom.audit.fit import fit_remarks
from rateloom.audit.limits import LIMITS, Limits
from rateloom.audit.members import Member, Members
from rateloom.audit.network import Entry, network_remarks
from rateloom.audit.rate import rate_remarks
from rateloom.audit.reaction import reaction_remarks
from rateloom.audit.saddle import SaddleVerdict, judge_saddle
from rateloom.audit.species import species_remarks

__all__ = [
    "CODES",
    "LIMITS",
    "SEVERITIES",
    "Entry",
    "Finding",
    "Limits",
    "Member",
    "Members",
    "SaddleVerdict",
    "Subject",
    "calculation_remarks",
    "check_codes",
    "fails",
    "fit_remarks",
    "judge",
    "judge_saddle",
    "network_remarks",
    "rate_remarks",
    "reaction_remarks",
    "species_remarks",
    "unmatched_accepts",
    "withholding",
]
