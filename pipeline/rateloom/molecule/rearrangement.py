"""Which bonds a reaction breaks and forms, found on the atoms of its saddle without looking at the mode.

The saddle lies between reactants and products, so both must be found in it: each as a choice among its bonds, firm
and stretched, that is the same molecules as the calculations of that side. Of all such pairs of choices the one that
changes the fewest bonds over the shortest distances is the reading; the atom orders of the separate calculations
never matter, and equivalent mappings give one reading.
"""

from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.molecule.bonds import Bond, atomic_numbers, bonds, distances, firm_bonds, pairs_within, radius_sums
from rateloom.molecule.edits import smallest_edit
from rateloom.molecule.matching import Pattern, pattern, selections, signature

HYDROGEN = 1
STRETCHED = 1.6  # up to here two atoms of a saddle may share a bond, whatever the reaction
STRETCHED_EXCESS = 0.65  # angstrom
FURTHEST_EXCESS = 1.0  # angstrom; within it a bond is sought at any stretch
ALIKE = 0.02  # stretches that count as equal: symmetric partners stay together
ATTEMPTS = ((0, 2.4), (1, 2.4), (3, 3.2))  # (pairs of each kind beyond those needed, largest stretch), in this order
ALWAYS_SOUND = 2  # changed bonds; reactants and products that differ cannot do with fewer of the same parity
COST_OF_CHANGE = 0.3  # one changed bond more weighs like this much more stretch


@dataclass(frozen=True, slots=True)
class Rearrangement:
    """How a saddle is read: the bonds of the reactants and of the products on its atoms."""

    kind: str
    """In words, e.g. ``hydrogen transfer``; ``change of shape`` where no bond changes."""
    reactant_bonds: frozenset[Bond]
    product_bonds: frozenset[Bond]

    @property
    def broken(self) -> tuple[Bond, ...]:
        """Bonds of the reactants alone, ascending."""
        return tuple(sorted(self.reactant_bonds - self.product_bonds))

    @property
    def formed(self) -> tuple[Bond, ...]:
        """Bonds of the products alone, ascending."""
        return tuple(sorted(self.product_bonds - self.reactant_bonds))

    @property
    def changed(self) -> tuple[Bond, ...]:
        """Bonds broken, then bonds formed."""
        return self.broken + self.formed


@dataclass(frozen=True, slots=True)
class Reading:
    """What the search for a rearrangement gave."""

    rearrangement: Rearrangement | None
    """None where reactants and products are not both found in the saddle."""
    complete: bool
    """Whether every choice was tried."""


def side_by_side(members: Sequence[tuple[Sequence[str], FloatArray]]) -> Pattern:
    """Pattern of separate molecules side by side.

    Parameters
    ----------
    members : sequence of (atoms, geometry)
        Element symbols and geometry, shape (n_atoms, 3) [angstrom], of each molecule; one atom has no bonds.

    Returns
    -------
    Pattern
        Bonds within each molecule, none between them.
    """
    numbers: list[int] = []
    joined: list[Bond] = []
    for atoms, geometry in members:
        start = len(numbers)
        numbers.extend(atomic_numbers(atoms))
        joined.extend((i + start, j + start) for i, j in bonds(atoms, geometry))
    return pattern(numbers, joined)


def read_saddle(
    atoms: Sequence[str], geometry: FloatArray, reactants: Pattern, products: Pattern, limit: int
) -> Reading:
    """Find reactants and products in a saddle.

    Parameters
    ----------
    atoms : sequence of str
        Element symbols of the saddle.
    geometry : ndarray, shape (n_atoms, 3)
        Of the saddle [angstrom].
    reactants, products : Pattern
        The molecules of each side.
    limit : int
        Largest number of choices to try for one side of a molecule of one atom; a larger molecule, whose choices cost
        more, gets fewer: a count and not a time, so that the verdict is the same on every machine.

    Returns
    -------
    Reading
        The rearrangement, None where the composition differs or one side is not in the saddle.
    """
    numbers = atomic_numbers(atoms)
    if not sorted(numbers) == sorted(reactants.numbers) == sorted(products.numbers):
        return Reading(None, complete=True)
    alike = reactants.signature == products.signature
    plain = bonds(atoms, geometry)
    if alike and reactants.fragments == 1 and signature(numbers, plain) == reactants.signature:
        return Reading(Rearrangement("change of shape", plain, plain), complete=True)
    stretch = distances(geometry) / radius_sums(atoms)
    firm = firm_bonds(atoms, geometry)
    near = pairs_within(atoms, geometry, STRETCHED, STRETCHED_EXCESS)
    complete, most = True, max(1, limit // len(numbers))
    tried: list[Bond] = []
    for spare, furthest in ATTEMPTS:
        pairs = _possible_bonds(atoms, geometry, reactants, products, spare, furthest)
        if pairs == tried:
            continue
        tried = pairs
        before, untried_before = selections(numbers, pairs, reactants, firm, most)
        after, untried_after = selections(numbers, pairs, products, firm, most) if before else ([], False)
        complete = complete and not (untried_before or untried_after)
        choices = [(a, b) for a in before for b in after if a != b and firm <= a | b]
        choices = [choice for choice in choices if _is_sound(choice[0] ^ choice[1], near, reactants, products)]
        if choices:
            chosen = min(choices, key=lambda choice: _cost(choice[0], choice[1], plain, stretch))
            return Reading(
                Rearrangement(_describe(numbers, reactants, products, *chosen), chosen[0], chosen[1]), complete
            )
    return Reading(None, complete)


def _possible_bonds(
    atoms: Sequence[str], geometry: FloatArray, reactants: Pattern, products: Pattern, spare: int, furthest: float
) -> list[Bond]:
    """Pairs that may share a bond on either side, of the kinds that occur there, the least stretched first."""
    numbers = np.array(atomic_numbers(atoms))
    first, second = np.triu_indices(len(numbers), 1)
    lengths, sums = distances(geometry)[first, second], radius_sums(atoms)[first, second]
    stretch = lengths / sums
    within = (stretch <= STRETCHED) | (lengths - sums <= STRETCHED_EXCESS)
    reachable = (stretch <= furthest) | (lengths - sums <= FURTHEST_EXCESS)
    low, high = np.minimum(numbers[first], numbers[second]), np.maximum(numbers[first], numbers[second])
    needed = Counter(dict(reactants.kinds)) | Counter(dict(products.kinds))  # the larger count of each kind
    taken: list[int] = []
    for kind, count in needed.items():
        members = np.flatnonzero((low == kind[0]) & (high == kind[1]) & reachable)
        members = members[np.argsort(stretch[members], kind="stable")]
        enough = min(max(count + spare, int(within[members].sum())), len(members))
        if enough:
            enough = int(np.searchsorted(stretch[members], stretch[members[enough - 1]] + ALIKE, side="right"))
        taken.extend(members[:enough].tolist())
    taken.sort(key=lambda pair: (stretch[pair], pair))
    return [(int(first[pair]), int(second[pair])) for pair in taken]


def _is_sound(changed: frozenset[Bond], near: frozenset[Bond], reactants: Pattern, products: Pattern) -> bool:
    """Whether changed bonds beyond the fewest the molecules ask for are all within reach, as in a relay of atoms."""
    if len(changed) <= ALWAYS_SOUND or changed <= near:
        return True
    edit = smallest_edit(reactants, products)
    return edit is not None and len(changed) <= len(edit[0]) + len(edit[1])


def _cost(
    before: frozenset[Bond], after: frozenset[Bond], plain: frozenset[Bond], stretch: FloatArray
) -> tuple[float, list[Bond]]:
    """How far-fetched a reading is: changed bonds, stretched bonds used or kept, unstretched bonds left out."""
    used = before | after
    total = COST_OF_CHANGE * len(before ^ after)
    total += sum(max(0.0, float(stretch[bond]) - 1.0) for bond in used)
    total += sum(max(0.0, float(stretch[bond]) - 1.0) for bond in before & after)  # what is kept should be firm
    total += sum(2.0 - float(stretch[bond]) for bond in plain - used)
    return total, sorted(before) + sorted(after)


def _describe(
    numbers: Sequence[int], reactants: Pattern, products: Pattern, before: frozenset[Bond], after: frozenset[Bond]
) -> str:
    """Kind of a reaction that changes bonds."""
    broken, formed = before - after, after - before
    alone = reactants.fragments == products.fragments == 1
    if reactants.signature == products.signature:
        return "degenerate rearrangement" if alone else "symmetric exchange"
    if not broken:
        return "ring closure" if alone else "addition"
    if not formed:
        return "ring opening" if alone else "dissociation"
    moving = {i for bond in broken for i in bond} & {i for bond in formed for i in bond}
    hydrogens = {i for i in moving if numbers[i] == HYDROGEN}
    if hydrogens and all(hydrogens & set(bond) for bond in broken | formed):
        return "hydrogen shift" if alone else "hydrogen transfer"
    if alone:
        return "rearrangement"
    return "substitution" if len(broken) == len(formed) == 1 and moving else "bond exchange"
