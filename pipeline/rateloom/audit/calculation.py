"""The calculations of one species or saddle: do they fit together, and were they brought to their end?

What keeps a species from being assembled at all (unfinished, no energy, wrong number of modes, other atoms) is
remarked on where it is assembled; here stands what would go unnoticed. Geometries in angstrom, as in the record.
"""

from collections.abc import Iterator
from contextlib import suppress

import numpy as np
import periodictable
from scipy.constants import angstrom, atomic_mass, c, centi

from rateloom.arrays import FloatArray
from rateloom.audit.geometries import shape_difference
from rateloom.audit.limits import Limits
from rateloom.calculation.record import Calculation
from rateloom.molecule import atomic_masses, moments_of, rotational_constants, shape_of
from rateloom.molecule.bonds import atomic_numbers, bonds
from rateloom.molecule.matching import signature
from rateloom.remarks import Remark

_DOUBLET = 0.75  # S(S+1): the limit of spin contamination for singlets, whose own S(S+1) is zero
_NO_ROTATION = 1e3  # times the other constants: what a program prints for the axis of a linear molecule


def calculation_remarks(
    frequencies: Calculation | None, energy: Calculation | None, limits: Limits, *, is_saddle: bool
) -> tuple[Remark, ...]:
    """Check the calculations of one species or saddle.

    Parameters
    ----------
    frequencies, energy : Calculation or None
        The calculation of geometry [angstrom] and frequencies [cm-1] and that of the energy [hartree].
    limits : Limits
        Thresholds, each in the unit of its name.
    is_saddle : bool
        Whether one imaginary mode belongs there.

    Returns
    -------
    tuple of Remark
        ``frequencies-at-another-geometry``, ``residual-gradient``, ``rotational-constants-differ``,
        ``spin-contamination``, ``geometries-differ``, ``connectivity-differs``, ``imaginary-mode-in-minimum``,
        ``second-imaginary-mode``, ``small-imaginary-mode``.

    References
    ----------
    .. [1] The source of each threshold stands in `Limits`.
    """
    remarks: list[Remark] = []
    if frequencies is not None:
        remarks += _surplus_modes(frequencies, limits, is_saddle=is_saddle)
        if has_geometry(frequencies):
            remarks += _other_geometry(frequencies, limits)
            remarks += _gradient(frequencies, limits)
            remarks += _constants(frequencies, limits)
        remarks += _spin("frequency", frequencies, limits)
    if energy is not None:
        remarks += _spin("energy", energy, limits)
        if frequencies is not None and has_geometry(frequencies) and has_geometry(energy):
            remarks += _two_geometries(frequencies, energy, limits, is_saddle=is_saddle)
    return tuple(remarks)


def has_geometry(calculation: Calculation) -> bool:
    """Whether a calculation has a finite position for each atom."""
    geometry = calculation.geometry_angstrom
    return geometry.shape == (len(calculation.atoms), 3) and bool(np.isfinite(geometry).all())


def _surplus_modes(calculation: Calculation, limits: Limits, *, is_saddle: bool) -> list[Remark]:
    """Tell imaginary modes that are noise from those that say that the geometry is another stationary point."""
    found = calculation.frequencies_per_cm
    if found is None:
        return []
    surplus = -np.sort(found[found < 0])[1 if is_saddle else 0 :]
    if not len(surplus):
        return []
    values = ", ".join(f"{value:.1f}i" for value in surplus) + " cm-1"
    where = "beside the reaction coordinate" if is_saddle else "in a minimum"
    limit = f"{limits.small_imaginary_per_cm:g} cm-1"
    if surplus.max() < limits.small_imaginary_per_cm:
        message = (
            f"an imaginary mode of {values} {where} is below {limit} and taken for noise or a flat torsion: it "
            "counts as a real vibration of the same magnitude; tighten geometry and grid to be rid of it"
        )
        return [Remark("small-imaginary-mode", message, values, limit)]
    message = (
        f"an imaginary mode of {values} {where}: this is another kind of stationary point; follow the mode downhill "
        "and optimise again (if accepted, it counts as a real vibration of the same magnitude)"
    )
    return [Remark("second-imaginary-mode" if is_saddle else "imaginary-mode-in-minimum", message, values, limit)]


def _other_geometry(calculation: Calculation, limits: Limits) -> list[Remark]:
    optimised = calculation.optimised_geometry_angstrom
    if optimised is None or calculation.frequencies_per_cm is None:
        return []
    limit = limits.geometry_difference_angstrom
    atoms = calculation.atoms
    if optimised.shape != calculation.geometry_angstrom.shape:
        return []
    difference = shape_difference(atoms, optimised, atoms, calculation.geometry_angstrom, limit)
    if difference <= limit:
        return []
    message = (
        f"the frequencies belong to a geometry that is not the one the optimisation ended at (distances differ by "
        f"{difference:.3f} angstrom): calculate them at the optimised geometry"
    )
    return [Remark("frequencies-at-another-geometry", message, f"{difference:.3f} angstrom", f"{limit:g} angstrom")]


def _gradient(calculation: Calculation, limits: Limits) -> list[Remark]:
    largest, limit = calculation.largest_gradient, limits.residual_gradient_hartree_per_bohr
    if largest is None or calculation.frequencies_per_cm is None or not abs(largest) > limit:
        return []
    message = (
        f"at the geometry of the frequencies the gradient still has a component of {abs(largest):.2e} hartree/bohr: "
        "it is no stationary point of this method; optimise with the method of the frequencies"
    )
    return [Remark("residual-gradient", message, f"{abs(largest):.2e} hartree/bohr", f"{limit:g} hartree/bohr")]


def _constants(calculation: Calculation, limits: Limits) -> list[Remark]:
    """Hold the printed rotational constants against those of the geometry read, whichever masses were used."""
    printed = calculation.rotational_constants_per_cm
    if printed is None or not len(printed) or len(calculation.atoms) < 2:
        return []
    positions = calculation.geometry_angstrom * angstrom
    shape = shape_of(positions)
    limit = limits.rotational_constant_percent
    worst = np.inf
    for masses in _possible_masses(calculation):
        calculated = rotational_constants(moments_of(masses, positions, shape)) / (c / centi)
        worst = min(worst, 100 * _largest_deviation(printed, calculated))
        if worst <= limit:
            return []
    if not np.isfinite(worst):
        return []
    listed = ", ".join(f"{constant:.5g}" for constant in printed)
    message = (
        f"the printed rotational constants ({listed} cm-1) are not those of the geometry read, by {worst:.2f} %: "
        "geometry and frequencies may belong to different steps of the calculation"
    )
    return [Remark("rotational-constants-differ", message, f"{worst:.2f} %", f"{limit:g} %")]


def _possible_masses(calculation: Calculation) -> Iterator[FloatArray]:
    """Masses printed, of the most abundant isotopes, and of the natural mixture [kg]; none of an unknown element."""
    if calculation.masses_u is not None and len(calculation.masses_u) == len(calculation.atoms):
        yield calculation.masses_u * atomic_mass
    with suppress(ValueError):  # remarked on where the species is assembled
        yield atomic_masses(calculation.atoms)
        yield np.array([periodictable.elements.symbol(atom).mass for atom in calculation.atoms]) * atomic_mass


def _largest_deviation(printed: FloatArray, calculated: FloatArray) -> float:
    """Compare in order where all are printed, else each with its nearest [1]."""
    if len(calculated) == 1:
        printed = printed[printed < _NO_ROTATION * calculated[0]]
    if len(printed) == len(calculated):
        return float(np.abs(printed / calculated - 1).max())
    return float(np.abs(printed[:, np.newaxis] / calculated - 1).min(axis=1).max(initial=0.0))


def _spin(file: str, calculation: Calculation, limits: Limits) -> list[Remark]:
    if calculation.spin_squared is None:
        return []
    spin = (calculation.multiplicity - 1) / 2
    pure = spin * (spin + 1)
    excess = 100 * (calculation.spin_squared - pure) / max(pure, _DOUBLET)
    limit = limits.spin_contamination_percent
    if abs(excess) <= limit:
        return []
    message = (
        f"in the {file} file <S**2> is {calculation.spin_squared:.3f} and should be {pure:.3g}: the reference mixes "
        "in other spin states; use a restricted open-shell or multireference method, or show that the energy is "
        "not harmed"
    )
    return [
        Remark("spin-contamination", message, f"{calculation.spin_squared:.3f}", f"{pure:.3g} within {limit:g} %")
    ]


def _two_geometries(
    frequencies: Calculation, energy: Calculation, limits: Limits, *, is_saddle: bool
) -> list[Remark]:
    """Hold the geometry of the energy against that of the frequencies, in any order of the atoms."""
    limit = limits.geometry_difference_angstrom
    difference = shape_difference(
        frequencies.atoms, frequencies.geometry_angstrom, energy.atoms, energy.geometry_angstrom, limit
    )
    # Other atoms are remarked on where the species is assembled.
    if difference <= limit or not np.isfinite(difference):
        return []
    value = f"{difference:.3f} angstrom"
    # The half-broken bonds of a saddle, or a hair's breadth elsewhere, make no other molecule.
    if not is_saddle and difference > limits.same_molecule_angstrom and _bonds_differ(frequencies, energy):
        message = "the energy file and the frequency file hold different bonds: they are of different molecules"
        return [Remark("connectivity-differs", message, value, f"{limit:g} angstrom")]
    message = (
        f"the energy was calculated at another geometry than the frequencies (distances differ by {value}): "
        "calculate it at the geometry of the frequencies"
    )
    return [Remark("geometries-differ", message, value, f"{limit:g} angstrom")]


def _bonds_differ(first: Calculation, second: Calculation) -> bool:
    """Whether two geometries hold different molecules, in any order of the atoms."""
    one, other = (
        signature(atomic_numbers(calculation.atoms), bonds(calculation.atoms, calculation.geometry_angstrom))
        for calculation in (first, second)
    )
    return one != other
