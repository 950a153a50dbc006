"""Canonical transition state theory: rate coefficients, equilibrium constants and path degeneracies, as logarithms.

Partition functions are per volume and from the ground level of each species; a rate coefficient of order n is in
(m3)^(n-1) s-1 per molecule.

Identical reactants (2 A -> ...): the rate coefficient k is that of the extent of reaction, rate = k [A]^2, so that
d[A]/dt = -2 k [A]^2. The law of mass action for 2 A and the saddle gives it without any further factor.

Degenerate reactions, whose products are the reactants again (H + H2, an inversion): each saddle is crossed in both
directions by what counts as the same reaction, so the rate of exchange is twice the one-way flux. H + H2 then has two
ways, one for each end of H2, as has D + H2 -> HD + H, whose saddle has no symmetry. Forward and reverse are the same
reaction, and equal.
"""

from collections.abc import Sequence

import numpy as np
from scipy.constants import h, k

from rateloom.arrays import FloatArray
from rateloom.statmech import Species


def path_degeneracy(reactants: Sequence[Species], saddle: Species, *, degenerate: bool = False) -> float:
    """Count the equivalent ways from the reactants over the saddle.

    Parameters
    ----------
    reactants : sequence of Species
        Once per molecule, with their symmetry numbers and optical isomers.
    saddle : Species
        With its own.
    degenerate : bool
        Whether the products are the reactants again.

    Returns
    -------
    float
        m(saddle) sigma(reactants) / (m(reactants) sigma(saddle)), twice that for a degenerate reaction [1].

    References
    ----------
    .. [1] A. Fernandez-Ramos, B. A. Ellingson, R. Meana-Paneda, J. M. C. Marques, D. G. Truhlar, Theor. Chem. Acc.
       118, 813 (2007) (from memory).
    """
    count = saddle.optical_isomers / saddle.symmetry_number
    for reactant in reactants:
        count *= reactant.symmetry_number / reactant.optical_isomers
    return 2.0 * count if degenerate else count


def log_rate_coefficient(
    log_saddle: FloatArray, log_reactants: FloatArray, barrier: float, temperatures: FloatArray
) -> FloatArray:
    """Natural logarithm of k T/h times the quotient of partition functions.

    Parameters
    ----------
    log_saddle : ndarray, shape (n_temperatures,)
        ln q per volume of the saddle, reaction coordinate left out [ln m-3].
    log_reactants : ndarray, shape (n_temperatures,)
        Sum of ln q per volume of the reactants [ln m-3 each].
    barrier : float
        Between the ground levels [J].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln k, without tunnelling [ln (m3)^(n-1) s-1].

    References
    ----------
    .. [1] H. Eyring, J. Chem. Phys. 3, 107 (1935).
    .. [2] M. G. Evans, M. Polanyi, Trans. Faraday Soc. 31, 875 (1935).
    """
    return np.log(k * temperatures / h) + log_saddle - log_reactants - barrier / (k * temperatures)


def log_equilibrium_constant(
    log_products: FloatArray, log_reactants: FloatArray, reaction_energy: float, temperatures: FloatArray
) -> FloatArray:
    """Natural logarithm of K_c, products over reactants.

    Parameters
    ----------
    log_products, log_reactants : ndarray, shape (n_temperatures,)
        Sums of ln q per volume of either side [ln m-3 each].
    reaction_energy : float
        Ground levels of the products less those of the reactants [J].
    temperatures : ndarray, shape (n_temperatures,)
        Temperatures [K], above zero.

    Returns
    -------
    ndarray, shape (n_temperatures,)
        ln K_c [ln m-3 per product more than there are reactants].

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, ch. 9 (from memory).
    """
    return log_products - log_reactants - reaction_energy / (k * temperatures)
