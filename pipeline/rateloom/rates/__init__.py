"""Rate theories: from species and saddle points to rate coefficients over a temperature grid.

Takes species with their partition functions, gives rate coefficients both ways, equilibrium constants and what there
is to remark on them. Partition functions are left to ``statmech``, expressions fitted to the rates to ``fits``, the
judgement to ``audit``, other units than SI to ``output``.
"""

from rateloom.rates.collision import hard_sphere_rate_coefficient, mean_relative_speed
from rateloom.rates.reaction import Participant, ReactionRates, evaluate_reaction, participant
from rateloom.rates.tst import log_equilibrium_constant, log_rate_coefficient, path_degeneracy
from rateloom.rates.tunnelling import TUNNELLING_MODELS, Barrier, Tunnelling, TunnellingModel

__all__ = [
    "TUNNELLING_MODELS",
    "Barrier",
    "Participant",
    "ReactionRates",
    "Tunnelling",
    "TunnellingModel",
    "evaluate_reaction",
    "hard_sphere_rate_coefficient",
    "log_equilibrium_constant",
    "log_rate_coefficient",
    "mean_relative_speed",
    "participant",
    "path_degeneracy",
]
