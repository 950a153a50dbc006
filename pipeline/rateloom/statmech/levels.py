"""Electronic levels of ground terms: fine structure and the spin-orbit lowering of the lowest level.

A calculation without spin-orbit coupling gives the mean energy of a term, its levels weighted with their
degeneracies. The lowest level lies below it by the spin-orbit lowering, the mean of the energies of the levels
above the lowest one.
"""

import math
from dataclasses import dataclass
from types import MappingProxyType

from scipy.constants import c, centi, h, k

_PER_CM = h * c / centi  # J
_ASD = "NIST Atomic Spectra Database"
_ASD_QUOTED = "NIST Atomic Spectra Database, as quoted in public tables"
_ASD_MEMORY = "NIST Atomic Spectra Database (from memory)"
_DIATOMIC = "K. P. Huber, G. Herzberg, Constants of Diatomic Molecules, Van Nostrand, 1979 (from memory)"

Composition = tuple[tuple[str, int], ...]
"""(element symbol, count), ascending."""


@dataclass(frozen=True, slots=True)
class GroundTerm:
    """Levels of the electronic ground term of an atom or a linear radical."""

    term: str
    """Term symbol, e.g. ``3P``."""
    multiplicity: int
    levels_per_cm: tuple[tuple[int, float], ...]
    """(degeneracy, energy above the lowest level [cm-1]), ascending."""
    source: str

    @property
    def levels(self) -> tuple[tuple[int, float], ...]:
        """(degeneracy, energy above the lowest level [J]), ascending."""
        return tuple((degeneracy, energy * _PER_CM) for degeneracy, energy in self.levels_per_cm)

    @property
    def lowering(self) -> float:
        """How far the lowest level lies below the mean of the term [J]."""
        return spin_orbit_lowering(self.levels)


_S_TERMS = {  # one level: no fine structure in an S term
    2: ("H", "Li", "Na", "K"),
    1: ("He", "Be", "Ne", "Mg", "Ar", "Ca", "Kr", "Xe"),
    4: ("N", "P", "As"),
}
_ATOMS = {
    "B": GroundTerm("2P", 2, ((2, 0.0), (4, 15.287)), _ASD_MEMORY),
    "C": GroundTerm("3P", 3, ((1, 0.0), (3, 16.41671), (5, 43.4135)), _ASD_QUOTED),
    "O": GroundTerm("3P", 3, ((5, 0.0), (3, 158.265), (1, 226.977)), _ASD_QUOTED),
    "F": GroundTerm("2P", 2, ((4, 0.0), (2, 404.141)), _ASD_QUOTED),
    "Al": GroundTerm("2P", 2, ((2, 0.0), (4, 112.061)), _ASD_QUOTED),
    "Si": GroundTerm("3P", 3, ((1, 0.0), (3, 77.115), (5, 223.157)), _ASD_MEMORY),
    "S": GroundTerm("3P", 3, ((5, 0.0), (3, 396.05648), (1, 573.59573)), _ASD_QUOTED),
    "Cl": GroundTerm("2P", 2, ((4, 0.0), (2, 882.3515)), _ASD_MEMORY),
    "Br": GroundTerm("2P", 2, ((4, 0.0), (2, 3685.24)), _ASD_QUOTED),
    "I": GroundTerm("2P", 2, ((4, 0.0), (2, 7602.9762)), _ASD_QUOTED),
}
_RADICALS: dict[Composition, GroundTerm] = {
    (("H", 1), ("O", 1)): GroundTerm("2Pi", 2, ((2, 0.0), (2, 139.2)), _DIATOMIC),
    (("H", 1), ("S", 1)): GroundTerm("2Pi", 2, ((2, 0.0), (2, 376.8)), _DIATOMIC),
    (("C", 1), ("H", 1)): GroundTerm("2Pi", 2, ((2, 0.0), (2, 27.95)), _DIATOMIC),
    (("N", 1), ("O", 1)): GroundTerm("2Pi", 2, ((2, 0.0), (2, 119.8)), _DIATOMIC),
    (("Cl", 1), ("O", 1)): GroundTerm("2Pi", 2, ((2, 0.0), (2, 318.0)), _DIATOMIC),
}
GROUND_TERMS: MappingProxyType[Composition, GroundTerm] = MappingProxyType(
    {
        ((symbol, 1),): GroundTerm(f"{multiplicity}S", multiplicity, ((multiplicity, 0.0),), _ASD)
        for multiplicity, symbols in _S_TERMS.items()
        for symbol in symbols
    }
    | {((symbol, 1),): term for symbol, term in _ATOMS.items()}
    | _RADICALS
)
"""Ground terms of neutral species by composition."""


def ground_term(composition: Composition, charge: int) -> GroundTerm | None:
    """Look up the built-in ground term of a species, whatever the multiplicity of its calculation.

    Parameters
    ----------
    composition : tuple of (str, int)
        Element symbols and counts, ascending [1].
    charge : int
        Charge [e].

    Returns
    -------
    GroundTerm or None
        None where there is no entry of this composition and charge.

    References
    ----------
    .. [1] Each entry names its source.
    """
    return GROUND_TERMS.get(composition) if charge == 0 else None


def spin_orbit_lowering(levels: tuple[tuple[int, float], ...]) -> float:
    """Mean energy of the levels of a term, weighted with their degeneracies.

    Parameters
    ----------
    levels : tuple of (int, float)
        Degeneracy [1] and energy above the lowest level [J].

    Returns
    -------
    float
        How far the lowest level lies below the mean [J].

    References
    ----------
    .. [1] The trace of the spin-orbit operator over a term vanishes: E. U. Condon, G. H. Shortley, The Theory of
       Atomic Spectra, Cambridge University Press, 1935 (from memory).
    """
    total = sum(degeneracy for degeneracy, _ in levels)
    return sum(degeneracy * energy for degeneracy, energy in levels) / total


def partition_above_mean(levels: tuple[tuple[int, float], ...], lowering: float, temperature: float) -> float:
    """Electronic partition function with energies counted from the mean of the term, as a calculation gives it.

    Both the levels and the lowering count: the ratio of two such numbers is the factor on the partition function of
    the species, and its inverse the factor on the rate coefficient of a reaction that consumes one of them.

    Parameters
    ----------
    levels : tuple of (int, float)
        Degeneracy [1] and energy above the lowest level [J].
    lowering : float
        How far the lowest level lies below the mean [J].
    temperature : float
        Temperature, above zero [K].

    Returns
    -------
    float
        Sum over the levels [1].

    Raises
    ------
    ValueError
        The temperature is not above zero.

    References
    ----------
    .. [1] D. A. McQuarrie, Statistical Mechanics, Harper & Row, 1976, ch. 5 (from memory).
    """
    if not temperature > 0:
        msg = f"the temperature must be above 0 K, not {temperature:.4g} K"
        raise ValueError(msg)
    return sum(degeneracy * math.exp(-(energy - lowering) / (k * temperature)) for degeneracy, energy in levels)
