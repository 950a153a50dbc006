"""Which molecule the calculations are of: files that ended well, the same atoms, charge, spin and isotopes."""

from collections import Counter
from dataclasses import dataclass

import numpy as np
from scipy.constants import angstrom, atomic_mass

from rateloom.arrays import FloatArray
from rateloom.calculation.record import Calculation
from rateloom.molecule import atomic_masses, atomic_number, isotope_labels, printed_isotopes, shape_of
from rateloom.remarks import Remark
from rateloom.statmech.choices import Choices
from rateloom.statmech.levels import Composition

_COINCIDENT = 0.1 * angstrom  # nuclei nearer than this are a misread geometry


@dataclass(frozen=True, slots=True, kw_only=True)
class Framework:
    """The nuclei of a species."""

    labels: tuple[str, ...]
    """Element symbols, or isotopes such as ``D``."""
    masses: FloatArray
    """Shape (n_atoms,) [kg]"""
    masses_of_modes: FloatArray
    """Shape (n_atoms,): masses that the frequencies were calculated with [kg]"""
    substituted: bool
    """Whether the two differ by isotopes."""
    positions: FloatArray
    """Shape (n_atoms, 3) [m]"""
    shape: str


def composition_of(atoms: tuple[str, ...]) -> Composition:
    """Count the elements of a molecule.

    Parameters
    ----------
    atoms : tuple of str
        Element symbols.

    Returns
    -------
    tuple of (str, int)
        Element symbols and counts, ascending [1].

    References
    ----------
    .. [1] No physics.
    """
    return tuple(sorted(Counter(atoms).items()))


def file_remarks(frequencies: Calculation | None, energy: Calculation | None) -> tuple[Remark, ...]:
    """Say whether the two files are of the same atoms; whether they ended well the reading has said.

    Parameters
    ----------
    frequencies, energy : Calculation or None
        The calculation of geometry and frequencies [cm-1] and that of the energy [hartree].

    Returns
    -------
    tuple of Remark
        ``geometries-differ``.

    References
    ----------
    .. [1] No physics.
    """
    remarks: list[Remark] = []
    if frequencies is not None and energy is not None:
        formulas = [_formula(composition_of(calculation.atoms)) for calculation in (energy, frequencies)]
        if formulas[0] != formulas[1]:
            message = f"The energy file is of {formulas[0]}, the frequency file of {formulas[1]}."
            remarks.append(Remark("geometries-differ", message, value=formulas[0], limit=formulas[1]))
    return tuple(remarks)


def framework_of(calculation: Calculation, choices: Choices) -> tuple[Framework | None, tuple[Remark, ...]]:
    """Settle isotopes, masses and shape of a molecule.

    Parameters
    ----------
    calculation : Calculation
        Whose geometry [angstrom] and masses [u] count.
    choices : Choices
        What the job file says.

    Returns
    -------
    Framework or None
        Positions [m] and masses [kg]; None where the geometry or an isotope is unusable.
    tuple of Remark
        ``calculation-not-readable``, ``isotope-not-known``, ``isotopes-from-output``, ``masses-not-isotopic``.

    References
    ----------
    .. [1] The job file's isotopes win, then those the program used, then the most abundant ones.
    """
    atoms, positions = calculation.atoms, calculation.geometry_angstrom * angstrom
    fault = _geometry_fault(atoms, positions)
    if fault:
        return None, (Remark("calculation-not-readable", fault),)
    try:
        printed, remarks = printed_isotopes(atoms, calculation.masses_u)
        isotopes = tuple(sorted((dict(printed) | dict(choices.isotopes)).items()))
        labels, masses = isotope_labels(atoms, isotopes), atomic_masses(atoms, isotopes)
        labels_of_modes, masses_of_modes = isotope_labels(atoms, printed), atomic_masses(atoms, printed)
    except ValueError as error:
        message = f"The isotopes cannot be set: {error}."
        return None, (Remark("isotope-not-known", message),)
    if calculation.masses_u is not None and len(calculation.masses_u) == len(atoms):
        masses_of_modes = calculation.masses_u * atomic_mass
    framework = Framework(
        labels=labels,
        masses=masses,
        masses_of_modes=masses_of_modes,
        substituted=labels != labels_of_modes,
        positions=positions,
        shape=shape_of(positions),
    )
    return framework, remarks


def charge_and_multiplicity(
    structure: Calculation, energy: Calculation | None, choices: Choices
) -> tuple[int, int, tuple[Remark, ...]]:
    """Settle charge and spin: the job file's, else those of the file with the geometry.

    Parameters
    ----------
    structure : Calculation
        The calculation with the geometry [angstrom].
    energy : Calculation or None
        The calculation of the energy [hartree], where it is another one.
    choices : Choices
        What the job file says.

    Returns
    -------
    int
        Charge [e].
    int
        Spin multiplicity [1].
    tuple of Remark
        ``electron-count-differs``, one for each disagreement.

    References
    ----------
    .. [1] A multiplicity of 2S + 1 needs 2S unpaired electrons of all there are.
    """
    remarks: list[Remark] = []
    chosen: list[int] = []
    for name in ("charge", "multiplicity"):
        wanted, found = getattr(choices, name), getattr(structure, name)
        taken = found if wanted is None else wanted
        chosen.append(taken)
        origin = "the file with the geometry" if wanted is None else "the job file"
        others = {found, taken if energy is None else getattr(energy, name)} - {taken}
        remarks.extend(
            Remark(
                "electron-count-differs",
                f"The {name} is {taken} in {origin}, which is used, but {other} in an output of this species.",
                value=str(other),
                limit=str(taken),
            )
            for other in sorted(others)
        )
    charge, multiplicity = chosen
    electrons = sum(map(atomic_number, structure.atoms)) - charge
    unpaired = multiplicity - 1
    if unpaired < 0 or unpaired > electrons or (electrons - unpaired) % 2:
        message = (
            f"{electrons} electrons (charge {charge}) cannot have multiplicity {multiplicity}: correct one of them."
        )
        remarks.append(
            Remark("electron-count-differs", message, f"multiplicity {multiplicity}", f"{electrons} electrons")
        )
    return charge, multiplicity, tuple(remarks)


def _formula(composition: Composition) -> str:
    return "".join(f"{symbol}{count if count > 1 else ''}" for symbol, count in composition)


def _geometry_fault(atoms: tuple[str, ...], positions: FloatArray) -> str:
    if not atoms or positions.shape != (len(atoms), 3) or not np.all(np.isfinite(positions)):
        return "The geometry is incomplete."
    for symbol in sorted(set(atoms)):
        try:
            atomic_number(symbol)
        except ValueError as error:
            return f"The geometry cannot be used: {error}."
    separations = np.linalg.norm(positions[:, np.newaxis] - positions, axis=2)
    first, second = np.nonzero(np.triu(separations < _COINCIDENT, k=1))
    if len(first):
        pair = f"{atoms[first[0]]}{first[0] + 1} and {atoms[second[0]]}{second[0] + 1}"
        return f"The atoms {pair} lie on one another."
    return ""
