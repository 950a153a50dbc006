"""Thresholds of the audit that a job file may set under ``audit: limits:``.

Most are common practice, not law; where one follows from an argument or a publication, its text says so. FINDINGS.md
tells what crossing one may do to a rate coefficient.
"""

from collections.abc import Mapping
from dataclasses import dataclass, fields
from types import MappingProxyType


@dataclass(frozen=True, slots=True, kw_only=True)
class Limits:
    """One field a threshold; the unit ends its name (``ratio`` for what has none)."""

    small_imaginary_per_cm: float = 100.0
    """Imaginary modes below this are taken for numerical noise or a flat torsion, not for a reaction coordinate.
    Common practice: integration grids and loose optimisations make imaginary modes of up to some tens of cm-1."""
    geometry_difference_angstrom: float = 0.01
    """Largest difference of an interatomic distance between two files that count as one geometry. A bond of 500 N/m
    stretched by this costs 0.15 kJ/mol, 6 % of a rate coefficient at 300 K; printed digits are ten times finer."""
    same_molecule_angstrom: float = 0.1
    """The same for one molecule at two levels of theory, whose bonds differ by up to 0.03 angstrom and whose longer
    distances by more; conformers and isomers differ by several times this."""
    residual_gradient_hartree_per_bohr: float = 1.0e-3
    """Largest component of the gradient at a stationary point. Optimisers stop at 4.5e-4 (Gaussian, NWChem) or 3e-4
    (ORCA, Psi4) by default; twice that is a geometry that was not optimised with the method of the frequencies."""
    rotational_constant_percent: float = 0.5
    """Difference between printed and recalculated rotational constants: several times what printed digits and
    tables of masses make, and a quarter of what a bond wrong by 0.01 angstrom makes."""
    spin_contamination_percent: float = 10.0
    """Excess of <S**2> over S(S+1), common practice; singlets are held to the limit of a doublet."""
    highest_frequency_per_cm: float = 5000.0
    """No vibration is faster: H2, the fastest, has 4401 cm-1 (K. P. Huber, G. Herzberg, Constants of Diatomic
    Molecules, Van Nostrand, 1979) and up to 4700 cm-1 at the Hartree-Fock level."""
    soft_mode_per_cm: float = 100.0
    """Real modes below this are seldom harmonic; common practice."""
    soft_mode_temperature_K: float = 1000.0
    """Where the weight of soft modes in a partition function is worked out: the middle of combustion grids."""
    soft_modes_factor_ratio: float = 3.0
    """Soft modes that change a rate coefficient by more than this factor either way decide it."""
    lowest_frequency_scale_ratio: float = 0.85
    """Scale factors in use begin at 0.89, for Hartree-Fock (A. P. Scott, L. Radom, J. Phys. Chem. 100, 16502
    (1996))."""
    highest_frequency_scale_ratio: float = 1.05
    """Scale factors in use end at about 1.03, for low modes and pure functionals (same source)."""
    slow_bimolecular_cm3_per_s: float = 1.0e-40
    """One molecule in 1 bar of partner at 1000 K then reacts once in 1e14 years."""
    slow_unimolecular_per_s: float = 1.0e-30
    """A molecule then lives 1e22 years."""
    collision_ratio: float = 1.0
    """Largest ratio of a bimolecular rate coefficient to that of hard spheres large enough to hold the molecules."""
    wigner_energy_ratio: float = 4.0
    """Largest h nu / k T of the reaction coordinate for Wigner's factor, the first term of a series, to be trusted:
    common practice; the factor is 1.67 there."""
    tunnelling_ratio: float = 10.0
    """Tunnelling factors above this rest on the width of a one-dimensional barrier more than on its height."""
    curvature_slope_ratio: float = 1.0
    """Largest difference of d ln k / d ln T between a rate coefficient and the expression fitted to it: beyond the
    range the two then drift apart by 10 % while the temperature changes by 10 %."""
    cycle_kJ_per_mol: float = 1.0
    """Largest sum of reaction energies round a closed cycle: a factor of 1.5 in an equilibrium constant at 300 K."""

    @classmethod
    def of(cls, changes: Mapping[str, float]) -> "Limits":
        """Make the limits of a job from what its file sets.

        Raises
        ------
        TypeError
            A name is not that of a threshold.
        """
        return cls(**changes)


LIMITS: MappingProxyType[str, float] = MappingProxyType({f.name: float(f.default) for f in fields(Limits)})  # type: ignore[arg-type]
"""Default by name."""
