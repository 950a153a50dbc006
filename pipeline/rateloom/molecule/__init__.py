"""The geometry of one molecule: masses, inertia, symmetry, bonds, normal modes and what moves in them.

Takes element symbols and positions, gives plain numbers and arrays. What they mean for a partition function is left
to ``statmech``, whether they suit a reaction to ``audit``; reading them from an output is left to ``calculation``.
"""

from rateloom.molecule.bonds import (
    Bond,
    atomic_numbers,
    bond_graph,
    bond_kind,
    bonds,
    chain_name,
    distances,
    radius_sums,
)
from rateloom.molecule.edits import smallest_edit
from rateloom.molecule.inertia import (
    LINEAR_TOLERANCE,
    centre_of_mass,
    moments_of,
    principal_axes,
    rotational_constants,
    shape_of,
)
from rateloom.molecule.internals import Coordinate, stretch_gradients
from rateloom.molecule.isotopes import (
    SAME_ISOTOPE,
    atomic_masses,
    atomic_number,
    isotope_labels,
    isotope_mass,
    printed_isotopes,
)
from rateloom.molecule.massweight import force_constants_from_modes, frequencies_for_masses
from rateloom.molecule.matching import Kind, Pattern, pattern, signature
from rateloom.molecule.modes import motion_share, normal_modes, without_rigid_motion
from rateloom.molecule.motion import Motion, leading_motion, sides, stretch_rates
from rateloom.molecule.rearrangement import HYDROGEN, Reading, Rearrangement, read_saddle, side_by_side
from rateloom.molecule.shapes import ShapeChange, describe_shape_change, shape_change
from rateloom.molecule.symmetry import STRICT_TOLERANCE, SYMMETRY_TOLERANCE, Symmetry, symmetry_of

__all__ = [
    "HYDROGEN",
    "LINEAR_TOLERANCE",
    "SAME_ISOTOPE",
    "STRICT_TOLERANCE",
    "SYMMETRY_TOLERANCE",
    "Bond",
    "Coordinate",
    "Kind",
    "Motion",
    "Pattern",
    "Reading",
    "Rearrangement",
    "ShapeChange",
    "Symmetry",
    "atomic_masses",
    "atomic_number",
    "atomic_numbers",
    "bond_graph",
    "bond_kind",
    "bonds",
    "centre_of_mass",
    "chain_name",
    "describe_shape_change",
    "distances",
    "force_constants_from_modes",
    "frequencies_for_masses",
    "isotope_labels",
    "isotope_mass",
    "leading_motion",
    "moments_of",
    "motion_share",
    "normal_modes",
    "pattern",
    "principal_axes",
    "printed_isotopes",
    "radius_sums",
    "read_saddle",
    "rotational_constants",
    "shape_change",
    "shape_of",
    "side_by_side",
    "sides",
    "signature",
    "smallest_edit",
    "stretch_gradients",
    "stretch_rates",
    "symmetry_of",
    "without_rigid_motion",
]
