"""One species or saddle: is it one molecule, with energies and vibrations that a molecule can have?

Symmetry, optical isomers, electronic levels and electron count are remarked on where the species is assembled.
"""

import networkx as nx
import numpy as np
from scipy.constants import c, centi

from rateloom.arrays import FloatArray
from rateloom.audit.calculation import has_geometry
from rateloom.audit.limits import Limits
from rateloom.calculation.record import Calculation
from rateloom.molecule.bonds import bond_graph
from rateloom.remarks import Remark
from rateloom.statmech import Species, log_vibration_by_mode

_PER_CM = c / centi  # Hz
_DESCENDING = (("SCF", "MP2"), ("SCF", "CCSD"), ("SCF", "CCSD(T)"), ("CCSD", "CCSD(T)"))  # the second lies lower
_ROUNDING = 1e-6  # hartree; one electron has no correlation energy


def species_remarks(
    frequencies: Calculation | None,
    energy: Calculation | None,
    species: Species | None,
    limits: Limits,
    *,
    is_saddle: bool,
) -> tuple[Remark, ...]:
    """Check one species or saddle.

    Parameters
    ----------
    frequencies, energy : Calculation or None
        The calculation of geometry [angstrom] and frequencies [cm-1] and that of the energy [hartree].
    species : Species or None
        What was made of them, in SI units.
    limits : Limits
        Thresholds, each in the unit of its name.
    is_saddle : bool
        Whether it is a transition state, which may hang loosely together.

    Returns
    -------
    tuple of Remark
        ``molecule-in-pieces``, ``frequency-implausible``, ``energies-out-of-order``, ``soft-mode``.

    References
    ----------
    .. [1] The source of each threshold stands in `Limits`.
    """
    remarks: list[Remark] = []
    if frequencies is not None:
        if not is_saddle and has_geometry(frequencies):
            remarks += _pieces(frequencies)
        remarks += _fast_modes(frequencies, limits)
    for name, calculation in (("frequency", frequencies), ("energy", energy)):
        if calculation is not None:
            remarks += _energies(name, calculation)
    if species is not None:
        remarks += _soft_modes(species, limits)
    return tuple(remarks)


def log_partition(frequencies: FloatArray, temperature: float) -> float:
    """Natural logarithm of the partition function of vibrations [Hz] at one temperature [K]; 0 without any."""
    return float(log_vibration_by_mode(frequencies, np.array([temperature])).sum())


def soft(species: Species, limits: Limits) -> FloatArray:
    """Give the real vibrations below the threshold of soft modes [Hz], shape (n_soft,)."""
    return species.frequencies[species.frequencies < limits.soft_mode_per_cm * _PER_CM]


def in_words(frequencies: FloatArray) -> str:
    """Write frequencies [Hz] in wavenumbers, e.g. ``34, 61 cm-1``."""
    return ", ".join(f"{frequency / _PER_CM:.0f}" for frequency in frequencies) + " cm-1"


def _pieces(calculation: Calculation) -> list[Remark]:
    atoms = calculation.atoms
    pieces = sorted(
        nx.connected_components(bond_graph(atoms, calculation.geometry_angstrom)), key=lambda p: (-len(p), min(p))
    )
    if len(pieces) < 2:
        return []
    listed = " + ".join("".join(f"{atoms[i]}{i + 1}" for i in sorted(piece)) for piece in pieces)
    message = (
        f"the molecule falls into {len(pieces)} pieces ({listed}): if it is not meant as a complex, its optimisation "
        "went astray; if it is, its soft modes are not harmonic"
    )
    return [Remark("molecule-in-pieces", message, f"{len(pieces)} pieces", "1 molecule")]


def _fast_modes(calculation: Calculation, limits: Limits) -> list[Remark]:
    found = calculation.frequencies_per_cm
    if found is None or not len(found):
        return []
    highest, limit = float(np.abs(found).max()), limits.highest_frequency_per_cm
    if not highest > limit:
        return []
    message = (
        f"a vibration of {highest:.0f} cm-1 is faster than that of any molecule, so that the zero-point energy is "
        "not plausible either: check the unit of the frequencies and the masses"
    )
    return [Remark("frequency-implausible", message, f"{highest:.0f} cm-1", f"{limit:g} cm-1")]


def _energies(file: str, calculation: Calculation) -> list[Remark]:
    """Check that correlation lowers the energy, more so the more of it is counted."""
    energies = calculation.energies_hartree
    for upper, lower in _DESCENDING:
        rise = energies.get(lower, -np.inf) - energies.get(upper, np.inf)
        if rise > _ROUNDING:
            message = (
                f"in the {file} file the {lower} energy lies above the {upper} energy: they may belong to different "
                "geometries or electronic states"
            )
            return [Remark("energies-out-of-order", message, f"{rise:.6f} hartree", "0 hartree")]
    return []


def _soft_modes(species: Species, limits: Limits) -> list[Remark]:
    """Name the soft modes and say what they contribute to the partition function."""
    modes = soft(species, limits)
    if not len(modes):
        return []
    temperature = limits.soft_mode_temperature_K
    share = log_partition(modes, temperature)
    message = (
        f"soft modes ({in_words(modes)}) are treated as harmonic and make a factor of {np.exp(share):.3g} of the "
        f"partition function at {temperature:g} K, ln of it {share:.2f}: look whether they are internal rotations or "
        "umbrella motions"
    )
    return [Remark("soft-mode", message, in_words(modes), f"{limits.soft_mode_per_cm:g} cm-1")]
