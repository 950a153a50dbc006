"""One elementary reaction over a temperature grid: everything that its species and its saddle say about it."""

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from scipy.constants import N_A, k

from rateloom.arrays import FloatArray
from rateloom.rates.tst import log_equilibrium_constant, log_rate_coefficient, path_degeneracy
from rateloom.rates.tunnelling import TUNNELLING_MODELS, Barrier
from rateloom.remarks import Remark
from rateloom.statmech import (
    PartitionFunctions,
    Species,
    Thermochemistry,
    partition_functions,
    thermochemistry,
)


@dataclass(frozen=True, slots=True)
class Participant:
    """A reactant, product or saddle with its functions over the temperature grid of the reaction."""

    species: Species
    partition: PartitionFunctions
    thermochemistry: Thermochemistry


@dataclass(frozen=True, slots=True, kw_only=True)
class ReactionRates:
    """Rate coefficients both ways, equilibrium and barriers of one reaction.

    Rate coefficients count concentrations in molecules: [s-1] with one reactant, [m3 s-1] with two, [m6 s-1] with
    three. What the rate is with identical reactants and in degenerate reactions says ``tst``.
    """

    temperatures: FloatArray
    """Shape (n_temperatures,) [K]; all arrays below have this shape."""
    forward: FloatArray
    """Rate coefficient, tunnelling included."""
    reverse: FloatArray
    forward_without_tunnelling: FloatArray
    reverse_without_tunnelling: FloatArray
    log_forward: FloatArray
    """ln of ``forward``, which stands where that is too small for a double."""
    log_reverse: FloatArray
    tunnelling_factors: FloatArray
    """The same both ways [1]."""
    K_c: FloatArray
    """[m-3] per product more than there are reactants"""
    K_p: FloatArray
    """[1]"""
    delta_H: FloatArray
    """Standard reaction enthalpy [J mol-1]"""
    delta_S: FloatArray
    """[J mol-1 K-1]"""
    delta_G: FloatArray
    """[J mol-1]"""
    pressure: float
    """Standard pressure [Pa]"""
    classical_barrier_forward: float
    """Electronic energies alone, spin-orbit lowering included [J mol-1]"""
    classical_barrier_reverse: float
    barrier_forward: float
    """Ground levels: zero-point energy included [J mol-1]"""
    barrier_reverse: float
    reaction_energy: float
    """Difference of the ground levels, delta_H at 0 K [J mol-1]"""
    imaginary_frequency: float
    """[Hz]"""
    tunnelling: str
    """Name of the model."""
    path_degeneracy: float
    """Equivalent ways forward that the rate counts."""
    computed_path_degeneracy: float
    """The same from symmetry numbers and optical isomers."""
    degenerate: bool
    """Whether the products are the reactants again."""
    remarks: tuple[Remark, ...] = ()


def participant(species: Species, temperatures: FloatArray, pressure: float) -> Participant:
    """Work out the functions of a species over a temperature grid.

    Parameters
    ----------
    species : Species
        Molecule, atom or saddle point, in SI units.
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.
    pressure : float
        Standard pressure [Pa], above zero.

    Returns
    -------
    Participant
        Species with partition functions [1] and thermochemistry [J mol-1].

    Raises
    ------
    ValueError
        Pressure, temperatures or a number of the species is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, ch. 5, 6 and 8 (from memory).
    """
    partition = partition_functions(species, temperatures)
    return Participant(species, partition, thermochemistry(species, temperatures, pressure, partition))


def evaluate_reaction(
    reactants: Sequence[Participant],
    products: Sequence[Participant],
    saddle: Participant,
    *,
    tunnelling: str,
    degenerate: bool = False,
    explicit_path_degeneracy: float | None = None,
) -> ReactionRates:
    """Rate coefficients both ways by transition state theory with tunnelling, and the equilibrium between them.

    The reverse rate coefficient is the forward one over K_c, to rounding, whatever tunnelling and path degeneracy.

    Parameters
    ----------
    reactants, products : sequence of Participant
        One for each molecule (A + A has two), all on one temperature grid [K] and at one standard pressure [Pa].
    saddle : Participant
        The saddle point.
    tunnelling : str
        A name of the table of tunnelling models.
    degenerate : bool
        Whether the products are the reactants again.
    explicit_path_degeneracy : float or None
        Equivalent ways forward [1]; takes the place of what follows from symmetry numbers.

    Returns
    -------
    ReactionRates
        Arrays over the temperature grid, SI units [(m3)^(n-1) s-1, J mol-1].

    Raises
    ------
    ValueError
        The saddle has no imaginary frequency, the path degeneracy is not above zero, or grids or pressures differ.
    KeyError
        No tunnelling model has that name.

    References
    ----------
    .. [1] H. Eyring, J. Chem. Phys. 3, 107 (1935) (from memory).
    .. [2] A. Fernandez-Ramos et al., Theor. Chem. Acc. 118, 813 (2007), for path degeneracies (from memory).
    """
    frequency = _imaginary_frequency(saddle.species)
    temperatures, pressure = _common_grid((*reactants, *products, saddle))
    up, down = _ground(saddle) - _ground(*reactants), _ground(saddle) - _ground(*products)
    tunnelled = TUNNELLING_MODELS[tunnelling](Barrier(up, down, frequency), temperatures)
    computed = path_degeneracy([one.species for one in reactants], saddle.species, degenerate=degenerate)
    ways = computed if explicit_path_degeneracy is None else explicit_path_degeneracy
    if not ways > 0:
        msg = f"the path degeneracy must be above 0, not {ways:.4g}"
        raise ValueError(msg)

    log_K = log_equilibrium_constant(_log_q(*products), _log_q(*reactants), up - down, temperatures)
    log_bare = log_rate_coefficient(_log_q(saddle), _log_q(*reactants), up, temperatures)
    # q of the saddle holds one crossing of every way; a degenerate reaction counts both (see tst)
    log_bare += np.log(ways / computed * (2 if degenerate else 1))
    log_forward = log_bare + tunnelled.log_factors
    gain = len(products) - len(reactants)
    delta_H, delta_S = _reaction_functions(reactants, products, up - down)
    with np.errstate(over="ignore"):  # infinity is the honest double of what is larger than all of them
        return ReactionRates(
            temperatures=temperatures,
            forward=np.exp(log_forward),
            reverse=np.exp(log_forward - log_K),
            forward_without_tunnelling=np.exp(log_bare),
            reverse_without_tunnelling=np.exp(log_bare - log_K),
            log_forward=log_forward,
            log_reverse=log_forward - log_K,
            tunnelling_factors=np.exp(tunnelled.log_factors),
            K_c=np.exp(log_K),
            K_p=np.exp(log_K + gain * np.log(k * temperatures / pressure)),
            delta_H=delta_H,
            delta_S=delta_S,
            delta_G=delta_H - temperatures * delta_S,
            pressure=pressure,
            classical_barrier_forward=N_A * (_electronic(saddle) - _electronic(*reactants)),
            classical_barrier_reverse=N_A * (_electronic(saddle) - _electronic(*products)),
            barrier_forward=N_A * up,
            barrier_reverse=N_A * down,
            reaction_energy=N_A * (up - down),
            imaginary_frequency=frequency,
            tunnelling=tunnelling,
            path_degeneracy=ways,
            computed_path_degeneracy=computed,
            degenerate=degenerate,
            remarks=tunnelled.remarks,
        )


def _imaginary_frequency(saddle: Species) -> float:
    if saddle.imaginary_frequency is None:
        msg = "the transition state has no imaginary frequency, and so no reaction coordinate"
        raise ValueError(msg)
    return saddle.imaginary_frequency


def _common_grid(participants: Sequence[Participant]) -> tuple[FloatArray, float]:
    """Temperatures and standard pressure of all."""
    first = participants[0]
    temperatures, pressure = first.partition.temperatures, first.thermochemistry.pressure
    for one in participants:
        same = np.array_equal(one.partition.temperatures, temperatures)
        same = same and np.array_equal(one.thermochemistry.temperatures, temperatures)
        if not same or one.thermochemistry.pressure != pressure:
            msg = "reactants, products and saddle are on different temperature grids or at different pressures"
            raise ValueError(msg)
    return temperatures, pressure


def _ground(*participants: Participant) -> float:
    return sum(one.species.ground_energy for one in participants)


def _electronic(*participants: Participant) -> float:
    return sum(one.species.electronic_energy - one.species.spin_orbit_lowering for one in participants)


def _log_q(*participants: Participant) -> FloatArray:
    return np.sum([one.partition.log_total for one in participants], axis=0)


def _reaction_functions(
    reactants: Sequence[Participant], products: Sequence[Participant], energy: float
) -> tuple[FloatArray, FloatArray]:
    """Reaction enthalpy and entropy [J mol-1, J mol-1 K-1]."""
    gained = [one.thermochemistry for one in products]
    lost = [one.thermochemistry for one in reactants]
    enthalpy = np.sum([one.enthalpy for one in gained], axis=0) - np.sum([one.enthalpy for one in lost], axis=0)
    entropy = np.sum([one.entropy for one in gained], axis=0) - np.sum([one.entropy for one in lost], axis=0)
    return N_A * energy + enthalpy, entropy
