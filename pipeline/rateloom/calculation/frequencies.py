"""Sets of frequencies in an output: which one counts, and which of its modes are vibrations."""

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from rateloom.arrays import FloatArray
from rateloom.calculation.motion import count_rigid, rigid_share
from rateloom.calculation.track import Entry, Track

SAME = 0.02
"""Two lists are one set printed twice if they differ by less [cm-1]: programs print two or more decimals."""
RIGID = 0.5
"""A mode with a larger share of translation and rotation is not a vibration [1]."""
ZERO = 0.05
"""A projected translation or rotation has a smaller frequency [cm-1]."""
MIXED = 0.05
"""Share of rigid motion above which displacements may be printed mass-weighted [1]."""


@dataclass(frozen=True, slots=True)
class FrequencySet:
    """Frequencies printed together."""

    begin: int
    end: int
    """Lines, counted from 1."""
    frequencies: FloatArray
    """[cm-1], imaginary ones negative, in the order of the file."""
    displacements: FloatArray | None
    """Shape (n_modes, n_atoms, 3), None where not or not wholly printed."""


def frequency_sets(track: Track, atoms: int) -> list[FrequencySet]:
    """Collect the sets of an output in the order of the file."""
    sets: list[FrequencySet] = []
    for entry in track.entries["vibfreqs"]:
        frequencies = np.array([float(value) for value in entry.value])
        if not len(frequencies):
            continue
        displacements = displacements_of(track, entry, len(frequencies), atoms)
        former = sets[-1] if sets else None
        if former and repeats(former, frequencies, entry, track):
            kept = former.displacements if displacements is None else displacements
            sets[-1] = FrequencySet(former.begin, entry.end, frequencies, kept)
        else:
            sets.append(FrequencySet(entry.begin, entry.end, frequencies, displacements))
    return sets


def repeats(former: FrequencySet, frequencies: FloatArray, entry: Entry, track: Track) -> bool:
    """Tell whether a list is the former set printed again."""
    if len(former.frequencies) != len(frequencies):
        return False
    moved = any(former.end < geometry.begin < entry.begin for geometry in track.geometries())
    return not moved and bool(np.abs(former.frequencies - frequencies).max() <= SAME)


def displacements_of(track: Track, entry: Entry, modes: int, atoms: int) -> FloatArray | None:
    """Find the displacements printed with a list of frequencies."""
    following = next((other.begin for other in track.entries["vibfreqs"] if other.begin > entry.end), None)
    for candidate in reversed(track.entries["vibdisps"]):
        if candidate.begin >= entry.begin and (following is None or candidate.begin < following):
            return whole(candidate.value, modes, atoms)
    return None


def whole(values: object, modes: int, atoms: int) -> FloatArray | None:
    """Make an array of displacements, None where some are missing."""
    try:
        array = np.array(values, dtype=np.float64)
    except (ValueError, TypeError):
        return None
    return array if array.shape == (modes, atoms, 3) and np.isfinite(array).all() else None


def complete(frequencies: int, atoms: int, rigid: int) -> bool:
    """Tell whether a number of frequencies is that of all vibrations, or of these with the rigid motions."""
    return frequencies in (3 * atoms, 3 * atoms - rigid)


def vibrations(
    chosen: FrequencySet, geometry: FloatArray, masses: FloatArray
) -> tuple[FloatArray, FloatArray | None]:
    """Leave translations and rotations out and sort the vibrations.

    Parameters
    ----------
    chosen : FrequencySet
        The set, with or without the 3, 5 or 6 rigid motions among it.
    geometry : ndarray, shape (n_atoms, 3)
        Positions in the frame of the displacements [angstrom].
    masses : ndarray, shape (n_atoms,)
        Masses [u].

    Returns
    -------
    tuple of ndarray, shapes (n_modes,) and (n_modes, n_atoms, 3)
        Frequencies [cm-1] ascending and displacements [1] in the same order, these None where not printed.
    """
    frequencies, displacements = chosen.frequencies, chosen.displacements
    if len(frequencies) == 3 * len(masses):
        rigid = rigid_modes(chosen, geometry, masses)
        frequencies = np.delete(frequencies, rigid)
        displacements = None if displacements is None else np.delete(displacements, rigid, axis=0)
    order = np.argsort(frequencies, kind="stable")
    if displacements is None:
        return frequencies[order], None
    return frequencies[order], cartesian(displacements[order], geometry, masses)


def rigid_modes(chosen: FrequencySet, geometry: FloatArray, masses: FloatArray) -> NDArray[np.intp]:
    """Tell translations and rotations by their displacements, else by their small frequencies."""
    count = count_rigid(geometry)
    if chosen.displacements is not None:
        rigid = np.flatnonzero(rigid_share(chosen.displacements, geometry, masses) > RIGID)
        if len(rigid) == count:
            return rigid
    return np.argsort(np.abs(chosen.frequencies), kind="stable")[:count]


def cartesian(displacements: FloatArray, geometry: FloatArray, masses: FloatArray) -> FloatArray:
    """Undo the mass-weighting of displacements that are vibrations only when taken as mass-weighted."""
    share = rigid_share(displacements, geometry, masses).max(initial=0.0)
    if share <= MIXED:
        return displacements
    bare = displacements / np.sqrt(masses)[:, np.newaxis]
    return bare if rigid_share(bare, geometry, masses).max(initial=0.0) < 0.1 * share else displacements


def leaves_one_out(chosen: FrequencySet, geometry: FloatArray) -> bool:
    """Tell whether a program projected six motions out of a geometry that is linear (within the same tolerance)."""
    zeros = int((np.abs(chosen.frequencies) < ZERO).sum())
    return len(chosen.frequencies) == 3 * len(geometry) and count_rigid(geometry) == 5 and zeros == 6
