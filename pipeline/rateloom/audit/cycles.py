"""Cycles of reactions that lead back to the same molecules but not to the same energy.

A cycle is a combination of reactions, forwards or backwards, that changes nothing once names of one molecule are
merged. Of all cycles through a molecule with two names the shortest is sought.
"""

from collections import Counter, defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import lcm

import numpy as np
from scipy.constants import N_A, kilo
from scipy.optimize import LinearConstraint, milp
from scipy.sparse import coo_array, hstack

from rateloom.arrays import FloatArray

_LARGEST_DENOMINATOR = 12  # of the number of times a reaction runs
_NOTHING = 1e-6
_SHOWN = 8  # steps of a cycle that are written out


@dataclass(frozen=True, slots=True)
class Balance:
    """What a reaction changes."""

    name: str
    change: Mapping[str, int]
    """Molecules formed less those consumed, by name of the species."""


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenCycle:
    """A cycle that does not close."""

    first: str
    second: str
    """Two names of one molecule."""
    steps: tuple[tuple[str, float], ...]
    """(reaction, times forwards; negative backwards)"""
    sum_kJ_per_mol: float

    @property
    def words(self) -> str:
        """Write e.g. ``ch4-h + 2 h2-oh (backwards)``."""
        parts = []
        for name, times in self.steps[:_SHOWN]:
            count = "" if abs(times) == 1 else f"{abs(times):g} "
            parts.append(f"{count}{name}{' (backwards)' if times < 0 else ''}")
        if len(self.steps) > _SHOWN:
            parts.append(f"{len(self.steps) - _SHOWN} more reactions")
        return " + ".join(parts)


def open_cycles(
    reactions: Sequence[Balance],
    energies: Mapping[str, float],
    molecules: Mapping[str, int],
    limit_kJ_per_mol: float,
) -> list[OpenCycle]:
    """Find cycles whose reaction energies do not add up to zero.

    Parameters
    ----------
    reactions : sequence of Balance
        Of species whose energies are known.
    energies : mapping of str to float
        Ground-level energy by name of the species [J].
    molecules : mapping of str to int
        A number by name, the same for names of one molecule [1].
    limit_kJ_per_mol : float
        What counts as zero [kJ/mol].

    Returns
    -------
    list of OpenCycle
        One for each further name of a molecule, where reactions close a cycle through it.

    References
    ----------
    .. [1] W. R. Smith, R. W. Missen, Chemical Reaction Equilibrium Analysis, Wiley, 1982, ch. 2, for the matrix of
       stoichiometric coefficients (from memory).
    """
    reactions = _in_cycles(reactions, molecules)
    used = {name for reaction in reactions for name in reaction.change}
    names_of: dict[int, list[str]] = defaultdict(list)
    for name in energies:
        if name in used:
            names_of[molecules[name]].append(name)
    found = []
    for first, *others in names_of.values():
        for second in others:
            if abs(energies[second] - energies[first]) * N_A / kilo <= limit_kJ_per_mol:
                continue
            times = _cycle_through(second, reactions, molecules)
            if times is None:
                continue
            total = sum(
                t * energies[n] * i for t, r in zip(times, reactions, strict=True) for n, i in r.change.items()
            )
            if abs(total) * N_A / kilo > limit_kJ_per_mol:
                steps = tuple((r.name, t) for t, r in zip(times, reactions, strict=True) if t)
                found.append(
                    OpenCycle(first=first, second=second, steps=steps, sum_kJ_per_mol=float(total) * N_A / kilo)
                )
    return found


def _in_cycles(reactions: Sequence[Balance], molecules: Mapping[str, int]) -> list[Balance]:
    """Drop, again and again, reactions that alone change the number of some molecule: no cycle holds them."""
    left = [(reaction, _merged(reaction, molecules)) for reaction in reactions]
    while True:
        uses = Counter(molecule for _, change in left for molecule in change)
        kept = [(reaction, change) for reaction, change in left if all(uses[molecule] > 1 for molecule in change)]
        if len(kept) == len(left):
            return [reaction for reaction, _ in left]
        left = kept


def _merged(reaction: Balance, molecules: Mapping[str, int]) -> dict[int, int]:
    """What a reaction changes by molecule, whatever its names."""
    change: Counter[int] = Counter()
    for name, number in reaction.change.items():
        change[molecules[name]] += number
    return {molecule: number for molecule, number in change.items() if number}


def _cycle_through(name: str, reactions: Sequence[Balance], molecules: Mapping[str, int]) -> list[float] | None:
    """How often each reaction runs in the shortest cycle that consumes a molecule under this name."""
    entries: dict[tuple[int, int], int] = defaultdict(int)
    for column, reaction in enumerate(reactions):
        for species, number in reaction.change.items():
            entries[molecules[species] + 1, column] += number
            if species == name:
                entries[0, column] += number
    rows, columns = zip(*entries, strict=True)
    compact = {row: place for place, row in enumerate(sorted(set(rows)))}  # row 0 is that of the name
    matrix = coo_array(
        (np.array(list(entries.values()), dtype=float), ([compact[row] for row in rows], columns)),
        shape=(len(compact), len(reactions)),
    ).tocsc()
    least = np.zeros(len(compact))
    least[0] = -np.inf
    most = np.zeros(len(compact))
    most[0] = -1.0
    # Without whole numbers the search stays a linear program, whose corners leave most reactions out.
    answer = milp(
        np.ones(2 * len(reactions)),
        constraints=LinearConstraint(hstack([matrix, -matrix]), least, most),
    )
    if answer.x is None:
        return None
    return _whole(answer.x[: len(reactions)] - answer.x[len(reactions) :])


def _whole(times: FloatArray) -> list[float]:
    """Multiply a cycle so that every reaction runs a whole number of times, if a small multiple does that."""
    fractions = [Fraction(float(t)).limit_denominator(_LARGEST_DENOMINATOR) for t in times]
    if max(abs(float(f) - t) for f, t in zip(fractions, times, strict=True)) > _NOTHING:
        return [float(t) if abs(t) > _NOTHING else 0.0 for t in times]
    multiple = lcm(*(fraction.denominator for fraction in fractions))
    return [float(fraction * multiple) for fraction in fractions]
