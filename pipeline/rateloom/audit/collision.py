"""The size of a molecule, for the gas-kinetic limit of a rate coefficient.

It is meant as an upper bound: the sphere about the centre of mass that holds the van der Waals spheres of all atoms.
"""

import numpy as np
from scipy.constants import angstrom

from rateloom.arrays import FloatArray
from rateloom.molecule import centre_of_mass
from rateloom.molecule.bonds import radius_sums

VAN_DER_WAALS_EXCESS = 0.8
"""Of a van der Waals radius over the covalent one [angstrom]; makes 1.1 for H, 1.6 for C, 1.8 for Cl (L. Pauling, The
Nature of the Chemical Bond, 3rd ed., Cornell, 1960, p. 260, from memory)."""


def enclosing_radius(elements: tuple[str, ...], masses: FloatArray, positions: FloatArray) -> float:
    """Radius of the sphere about the centre of mass that holds a molecule.

    Parameters
    ----------
    elements : tuple of str
        Element symbols.
    masses : ndarray, shape (n_atoms,)
        [kg]
    positions : ndarray, shape (n_atoms, 3)
        [m]

    Returns
    -------
    float
        [m]

    References
    ----------
    .. [1] Covalent radii: B. Cordero et al., Dalton Trans. 2008, 2832; the excess: L. Pauling, as above.
    """
    radii = (np.diagonal(radius_sums(elements)) / 2 + VAN_DER_WAALS_EXCESS) * angstrom
    return float((np.linalg.norm(positions - centre_of_mass(masses, positions), axis=1) + radii).max())
