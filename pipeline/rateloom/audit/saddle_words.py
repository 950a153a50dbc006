"""How a change of bonds or of shape is put into words for a chemist."""

from collections import Counter
from collections.abc import Sequence

import periodictable

from rateloom.arrays import FloatArray
from rateloom.molecule import (
    Coordinate,
    Kind,
    Pattern,
    Rearrangement,
    bond_kind,
    chain_name,
    smallest_edit,
)

COORDINATES_NAMED = 2


def expected_bonds(atoms: Sequence[str], rearrangement: Rearrangement) -> str:
    """Say which bonds of the saddle must change, e.g. ``C1-H2 to stretch and H2-O7 to shorten``."""
    parts = [f"{chain_name(atoms, bond)} to stretch" for bond in rearrangement.broken]
    parts += [f"{chain_name(atoms, bond)} to shorten" for bond in rearrangement.formed]
    return joined(parts)


def bonds_that_move(atoms: Sequence[str], rearrangement: Rearrangement, rates: FloatArray) -> str:
    """Say how the changing bonds move, on the side where the bonds that break do stretch."""
    sign = 1.0 if rates[: len(rearrangement.broken)].sum() >= rates[len(rearrangement.broken) :].sum() else -1.0
    return joined(
        [
            f"{chain_name(atoms, bond)} ({'stretch' if sign * rate > 0 else 'shortening'})"
            for bond, rate in zip(rearrangement.changed, rates, strict=True)
        ]
    )


def expected_shape(atoms: Sequence[str], moving: Sequence[Coordinate]) -> str:
    """Say which angles or torsions must change, e.g. ``H3-N1-N2-H4 (torsion) to turn``."""
    if not moving:
        return ""
    leading = [coordinate for coordinate in moving if coordinate.kind == moving[0].kind][:COORDINATES_NAMED]
    named = [f"{chain_name(atoms, coordinate.atoms)} ({coordinate.kind})" for coordinate in leading]
    return f"{' or '.join(named)} to {'turn' if moving[0].kind == 'torsion' else 'bend'}"


def expected_kinds(reactants: Pattern, products: Pattern) -> str:
    """Say which kinds of bonds must change, from the molecules alone; empty where that cannot be told."""
    edit = smallest_edit(reactants, products)
    if edit is None:
        return ""
    return joined(_kinds(edit[0], "break") + _kinds(edit[1], "form"))


def joined(parts: Sequence[str]) -> str:
    """Join parts of a sentence with commas and a last ``and``."""
    return " and ".join(filter(None, (", ".join(parts[:-1]), parts[-1]))) if parts else ""


def _kinds(kinds: Sequence[Kind], verb: str) -> list[str]:
    phrases = []
    for kind, count in sorted(Counter(kinds).items()):
        name = bond_kind([periodictable.elements[number].symbol for number in kind], (0, 1))
        phrases.append(f"one {name} bond to {verb}" if count == 1 else f"{count} {name} bonds to {verb}")
    return phrases
