"""The physical species: what statistical mechanics needs to know of a molecule or a saddle point, in SI units.

Energies are per molecule. The zero of electronic energy is that of the calculation (separated nuclei and electrons);
the ground level of a species is electronic energy - spin-orbit lowering + zero-point energy.
"""

from dataclasses import dataclass

from rateloom.arrays import FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Species:
    """One molecule, atom or saddle point."""

    composition: tuple[tuple[str, int], ...]
    """(element symbol, count), ascending; isotopes count as their element."""
    charge: int
    multiplicity: int
    mass: float
    """[kg]"""
    shape: str
    """``atom``, ``linear`` or ``nonlinear``."""
    moments: FloatArray
    """Shape (0,), (1,) or (3,): principal moments of inertia for atom, linear, nonlinear [kg m2], ascending."""
    symmetry_number: int
    optical_isomers: int
    frequencies: FloatArray
    """Shape (n_modes,): real vibrations, scaled for the partition function, reaction coordinate left out [Hz]."""
    imaginary_frequency: float | None
    """Magnitude of the reaction coordinate's frequency, scaled like the modes [Hz]; None in a minimum."""
    zero_point_energy: float
    """With its own scale factor [J]."""
    electronic_energy: float
    """[J]"""
    spin_orbit_lowering: float
    """[J], not negative"""
    degeneracies: FloatArray
    """Shape (n_levels,) [1]"""
    level_energies: FloatArray
    """Shape (n_levels,): above the lowest level [J]"""

    @property
    def ground_energy(self) -> float:
        """Energy of the lowest level, the zero of its partition function [J]."""
        return self.electronic_energy - self.spin_orbit_lowering + self.zero_point_energy
