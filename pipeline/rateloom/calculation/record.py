"""What one output file says, in the units its program prints.

Nothing in a record depends on where the file lies or when it was read: two files that say the same give equal
records.
"""

from dataclasses import dataclass

from rateloom.arrays import FloatArray
from rateloom.remarks import Remark


@dataclass(frozen=True, slots=True)
class Level:
    """Level of theory as far as the output prints it; an empty string where it does not."""

    method: str = ""
    """Method or functional in its usual spelling, e.g. ``B3LYP``, ``CCSD(T)``."""
    basis: str = ""
    solvent: str = ""
    dispersion: str = ""

    def __str__(self) -> str:
        """Write ``method-dispersion/basis (solvent)``."""
        method = f"{self.method}-{self.dispersion}" if self.dispersion else self.method
        name = "/".join(part for part in (method, self.basis) if part) or "unknown level"
        return f"{name} ({self.solvent})" if self.solvent else name


@dataclass(frozen=True, slots=True, kw_only=True)
class Calculation:
    """One calculation: the last complete set of frequencies of a file with the geometry it belongs to."""

    program: str
    program_version: str
    level: Level
    charge: int
    multiplicity: int
    atoms: tuple[str, ...]
    """Element symbols, in the order of the output."""
    geometry_angstrom: FloatArray
    """Shape (n_atoms, 3): the geometry that the frequencies belong to, else the last one printed."""
    masses_u: FloatArray | None = None
    """Shape (n_atoms,): the masses the program used, where printed."""
    energies_hartree: dict[str, float]
    """The last energy of each kind at that geometry: ``SCF``, ``DFT``, ``MP2``, ``CCSD``, ``CCSD(T)``, ..."""
    energy_kind: str
    """Which of them is taken; empty where none was read."""
    energy_reason: str = ""
    """Why that one."""
    frequencies_per_cm: FloatArray | None = None
    """Shape (n_modes,): vibrations alone (translations and rotations removed), imaginary ones negative, ascending."""
    displacements: FloatArray | None = None
    """Shape (n_modes, n_atoms, 3): Cartesian displacements of each mode, in the order of the frequencies [1]."""
    hessian: FloatArray | None = None
    """Shape (3 n_atoms, 3 n_atoms) [hartree/bohr2], where printed."""
    rotational_constants_per_cm: FloatArray | None = None
    """As printed by the program, descending, infinite or zero entries removed."""
    spin_squared: float | None = None
    """<S**2> of the reference as printed (before any annihilation)."""
    largest_gradient: float | None = None
    """Largest component of the gradient at the geometry of the frequencies [hartree/bohr], where printed."""
    optimised_geometry_angstrom: FloatArray | None = None
    """Shape (n_atoms, 3): where an optimisation in the file ended, if it holds one."""
    converged: bool | None = None
    """Whether the last optimisation converged; None where the file holds none."""
    finished: bool
    """Whether the program said that it ended normally and the last set of results is complete."""
    remarks: tuple[Remark, ...] = ()
    """What was repaired, assumed or chosen while reading."""

    @property
    def energy_hartree(self) -> float | None:
        """The energy taken [hartree], None where the file holds none."""
        return self.energies_hartree.get(self.energy_kind)
