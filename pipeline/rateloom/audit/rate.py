"""The rate coefficients of one reaction: is their size possible, and what do they hang on?"""

from collections.abc import Sequence

import numpy as np
from scipy.constants import centi, h, k

from rateloom.arrays import FloatArray
from rateloom.audit.collision import enclosing_radius
from rateloom.audit.limits import Limits
from rateloom.audit.species import in_words, log_partition, soft
from rateloom.rates import ReactionRates, hard_sphere_rate_coefficient
from rateloom.remarks import Remark
from rateloom.statmech import Assembly, Species


def rate_remarks(
    rates: ReactionRates,
    reactants: Sequence[Assembly],
    products: Sequence[Assembly],
    saddle: Species,
    limits: Limits,
) -> tuple[Remark, ...]:
    """Check the rate coefficients of one reaction over one saddle.

    Parameters
    ----------
    rates : ReactionRates
        Rate coefficients [s-1, m3 s-1] over temperatures [K].
    reactants, products : sequence of Assembly
        One a molecule, in SI units.
    saddle : Species
        In SI units.
    limits : Limits
        Thresholds, each in the unit of its name.

    Returns
    -------
    tuple of Remark
        ``above-collision-limit``, ``too-slow-to-matter``, ``soft-modes-decide-rate``, ``wigner-beyond-validity``,
        ``large-tunnelling-factor``.

    References
    ----------
    .. [1] E. Wigner, Z. Phys. Chem. B 19 (1932) 203, for the validity of the tunnelling factor (from memory).
    """
    remarks: list[Remark] = []
    for direction, values, molecules in (
        ("forward", rates.log_forward, reactants),
        ("reverse", rates.log_reverse, products),
    ):
        remarks += _collision(direction, values, rates.temperatures, molecules, limits)
        remarks += _slowness(direction, values, len(molecules), limits)
        remarks += _soft_modes(direction, molecules, saddle, limits)
    remarks += _wigner(rates, limits)
    remarks += _tunnelling(rates, limits)
    return tuple(remarks)


def _collision(
    direction: str, log_rates: FloatArray, temperatures: FloatArray, molecules: Sequence[Assembly], limits: Limits
) -> list[Remark]:
    """Hold a bimolecular rate coefficient against the collisions of spheres; ions attract one another beyond them."""
    if len(molecules) != 2:
        return []
    first, second = molecules
    if first.species is None or second.species is None or first.facts is None or second.facts is None:
        return []
    if first.species.charge or second.species.charge:
        return []
    diameter = sum(
        enclosing_radius(_elements(facts.labels), facts.masses, facts.positions)
        for facts in (first.facts, second.facts)
    )
    reduced_mass = first.species.mass * second.species.mass / (first.species.mass + second.species.mass)
    limit = hard_sphere_rate_coefficient(reduced_mass, diameter, temperatures)
    if _same(first.species, second.species):
        limit = limit / 2
    with np.errstate(over="ignore"):
        rates = np.exp(log_rates)
    ratios = rates / limit
    worst = int(ratios.argmax())
    if not ratios[worst] > limits.collision_ratio:
        return []
    where = temperatures[ratios > limits.collision_ratio]
    span = f"at {where[0]:g} K" if len(where) == 1 else f"between {where[0]:g} and {where[-1]:g} K"
    message = (
        f"the {direction} rate coefficient is above the collision rate of spheres that hold the molecules "
        f"({diameter * 1e10:.1f} angstrom) {span}, {ratios[worst]:.3g} times at {temperatures[worst]:g} K: capture, "
        "not the saddle, sets the rate there"
    )
    value = f"{rates[worst] / centi**3:.3g} cm3 molecule-1 s-1"
    return [Remark("above-collision-limit", message, value, f"{limit[worst] / centi**3:.3g} cm3 molecule-1 s-1")]


def _elements(labels: tuple[str, ...]) -> tuple[str, ...]:
    """Drop the mass number of isotopes such as ``13C``; D and T are known as they are."""
    return tuple(label.lstrip("0123456789") for label in labels)


def _same(first: Species, second: Species) -> bool:
    return (first.composition, first.mass, first.charge, first.multiplicity, first.ground_energy) == (
        second.composition,
        second.mass,
        second.charge,
        second.multiplicity,
        second.ground_energy,
    )


def _slowness(direction: str, log_rates: FloatArray, molecularity: int, limits: Limits) -> list[Remark]:
    if molecularity not in (1, 2):
        return []
    limit, factor, unit = (
        (limits.slow_unimolecular_per_s, 1.0, "s-1"),
        (limits.slow_bimolecular_cm3_per_s, centi**3, "cm3 molecule-1 s-1"),
    )[molecularity - 1]
    largest = float(log_rates.max()) - np.log(factor)
    if not largest < np.log(limit):
        return []
    value = f"{np.exp(largest):.3g} {unit}"
    message = f"the {direction} rate coefficient is nowhere above {value}: the reaction does not happen"
    return [Remark("too-slow-to-matter", message, value, f"{limit:g} {unit}")]


def _soft_modes(direction: str, molecules: Sequence[Assembly], saddle: Species, limits: Limits) -> list[Remark]:
    """Say how much of ln k the soft modes of saddle and molecules decide, those of the molecules taken away."""
    temperature = limits.soft_mode_temperature_K
    below = [soft(molecule.species, limits) for molecule in molecules if molecule.species is not None]
    lower = np.sort(np.concatenate([*below, np.zeros(0)]))
    upper = soft(saddle, limits)
    share = log_partition(upper, temperature) - log_partition(lower, temperature)
    if not abs(share) > np.log(limits.soft_modes_factor_ratio):
        return []
    which = [f"{name} {in_words(modes)}" for name, modes in (("saddle", upper), ("molecules", lower)) if len(modes)]
    message = (
        f"soft modes ({'; '.join(which)}), taken as harmonic, make {share:+.2f} of ln k of the {direction} reaction "
        f"at {temperature:g} K, a factor of {np.exp(share):.3g}"
    )
    return [Remark("soft-modes-decide-rate", message, f"{share:+.2f}", f"factor {limits.soft_modes_factor_ratio:g}")]


def _wigner(rates: ReactionRates, limits: Limits) -> list[Remark]:
    if rates.tunnelling != "wigner":
        return []
    reduced = h * rates.imaginary_frequency / (k * rates.temperatures)
    limit = limits.wigner_energy_ratio
    if not reduced.max() > limit:
        return []
    coldest = int(reduced.argmax())
    above = h * rates.imaginary_frequency / (k * limit)
    message = (
        f"Wigner's tunnelling factor, {rates.tunnelling_factors[coldest]:.3g} at {rates.temperatures[coldest]:g} K, "
        f"is the first term of a series that fails below {above:.0f} K for this mode: use Eckart's"
    )
    return [Remark("wigner-beyond-validity", message, f"h nu / k T {reduced[coldest]:.2f}", f"{limit:g}")]


def _tunnelling(rates: ReactionRates, limits: Limits) -> list[Remark]:
    largest = int(rates.tunnelling_factors.argmax())
    factor, limit = float(rates.tunnelling_factors[largest]), limits.tunnelling_ratio
    if not factor > limit:
        return []
    message = (
        f"tunnelling multiplies the rate coefficient by {factor:.3g} at {rates.temperatures[largest]:g} K: there it "
        "hangs on the shape of the barrier, which one frequency and two heights only suggest"
    )
    return [Remark("large-tunnelling-factor", message, f"{factor:.3g}", f"{limit:g}")]
