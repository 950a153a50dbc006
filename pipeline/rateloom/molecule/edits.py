"""The fewest bonds that turn some molecules into others, from their bonds alone, without the geometry of a saddle."""

from itertools import combinations

from rateloom.molecule.bonds import Bond
from rateloom.molecule.matching import Kind, Pattern, Signature, kind_of, signature

EDIT_TRIALS = 3000


def smallest_edit(
    reactants: Pattern, products: Pattern, limit: int = EDIT_TRIALS
) -> tuple[list[Kind], list[Kind]] | None:
    """Kinds of the bonds that must at least break and form, from the molecules alone.

    The edit with the fewest changed bonds: taking some bonds from the reactants leaves the same atoms and bonds as
    taking others from the products.

    Parameters
    ----------
    reactants, products : Pattern
        The molecules of each side.
    limit : int
        Largest number of trials.

    Returns
    -------
    tuple of two lists of (int, int), or None
        Elements of the bonds that break and of those that form; None where the atoms differ or the limit is reached.
    """
    if sorted(reactants.numbers) != sorted(products.numbers):
        return None
    surplus = len(reactants.bonds) - len(products.bonds)
    for formed in range(max(0, -surplus), len(products.bonds) + 1):
        left: dict[Signature, tuple[Bond, ...]] = {}
        for taken in combinations(sorted(products.bonds), formed):
            limit -= 1
            left.setdefault(signature(products.numbers, products.bonds.difference(taken)), taken)
            if limit < 0:
                return None
        for taken in combinations(sorted(reactants.bonds), formed + surplus):
            limit -= 1
            rest = left.get(signature(reactants.numbers, reactants.bonds.difference(taken)))
            if rest is not None:
                return (
                    sorted(kind_of(reactants.numbers, bond) for bond in taken),
                    sorted(kind_of(products.numbers, bond) for bond in rest),
                )
            if limit < 0:
                return None
    return None
