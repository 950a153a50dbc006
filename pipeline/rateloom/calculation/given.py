"""Numbers of a paper in the place of an output file: the same record."""

from collections.abc import Sequence

import numpy as np

from rateloom.calculation.record import Calculation, Level

KIND = "given"


def given_calculation(
    *,
    energy_hartree: float,
    atoms: Sequence[str],
    geometry_angstrom: Sequence[Sequence[float]],
    multiplicity: int,
    charge: int = 0,
    frequencies_per_cm: Sequence[float] = (),
    level: str = "",
) -> Calculation:
    """Make a record of given numbers.

    Parameters
    ----------
    energy_hartree : float
        Electronic energy without zero-point energy [hartree].
    atoms : sequence of str, length n_atoms
        Element symbols.
    geometry_angstrom : sequence, shape (n_atoms, 3)
        Positions [angstrom].
    multiplicity : int
        Spin multiplicity [1].
    charge : int
        Charge [e].
    frequencies_per_cm : sequence of float, length n_modes
        Harmonic frequencies without translations and rotations, imaginary ones negative [cm-1].
    level : str
        Level of theory or source, free text.

    Returns
    -------
    Calculation
        A finished calculation of the program ``given``.

    Raises
    ------
    ValueError
        Atoms and positions differ in number.
    """
    geometry = np.array(geometry_angstrom, dtype=np.float64).reshape(-1, 3)
    if len(geometry) != len(atoms):
        msg = f"there are {len(atoms)} atoms and {len(geometry)} positions"
        raise ValueError(msg)
    frequencies = np.sort(np.array(frequencies_per_cm, dtype=np.float64))
    return Calculation(
        program="given",
        program_version="",
        level=Level(method=level),
        charge=charge,
        multiplicity=multiplicity,
        atoms=tuple(atoms),
        geometry_angstrom=geometry,
        energies_hartree={KIND: float(energy_hartree)},
        energy_kind=KIND,
        energy_reason="given in the job file",
        frequencies_per_cm=frequencies if len(frequencies) else None,
        finished=True,
    )
