"""Telling molecules apart by their bonds: a signature that any order of the atoms leaves alone, and bounded searches.

Two sets of bonds are the same molecules when their signatures are equal. The signature is the stable colouring of the
atoms (each colour holds the element and, in turn, the colours of the neighbours) together with the sizes of the
fragments; it is blind only to regular graphs of one element, which a chemical formula of fixed fragments excludes.
"""

from collections import Counter
from collections.abc import Collection, Iterable, Iterator, Sequence
from dataclasses import dataclass
from itertools import combinations, product
from math import comb, prod

import networkx as nx

from rateloom.molecule.bonds import Bond

Signature = tuple[tuple[int, ...], tuple[int, ...]]
Kind = tuple[int, int]
"""Two atomic numbers, ascending."""


@dataclass(frozen=True, slots=True)
class Pattern:
    """One or more molecules as bonds between elements, their geometry forgotten."""

    numbers: tuple[int, ...]
    """Atomic numbers."""
    bonds: frozenset[Bond]
    signature: Signature
    kinds: tuple[tuple[Kind, int], ...]
    """How many bonds of each kind, ascending."""

    @property
    def fragments(self) -> int:
        """Number of separate molecules."""
        return len(self.signature[1])


def pattern(numbers: Sequence[int], bonds: Iterable[Bond]) -> Pattern:
    """Make a pattern of atomic numbers and bonds."""
    bonds = frozenset(bonds)
    kinds = Counter(kind_of(numbers, bond) for bond in bonds)
    return Pattern(tuple(numbers), bonds, signature(numbers, bonds), tuple(sorted(kinds.items())))


def kind_of(numbers: Sequence[int], bond: Bond) -> Kind:
    """Elements of a bond as ascending atomic numbers."""
    first, second = numbers[bond[0]], numbers[bond[1]]
    return (first, second) if first <= second else (second, first)


def signature(numbers: Sequence[int], bonds: Iterable[Bond]) -> Signature:
    """Colours of the atoms and sizes of the fragments, both sorted: equal for the same molecules in any atom order.

    Parameters
    ----------
    numbers : sequence of int
        Atomic numbers.
    bonds : iterable of (int, int)
        Pairs of atoms.

    Returns
    -------
    tuple
        Sorted colours and sorted fragment sizes.

    References
    ----------
    .. [1] B. Weisfeiler, A. Leman, Nauchno-Technicheskaya Informatsia 2, 12 (1968) (from memory).
    """
    neighbours: list[list[int]] = [[] for _ in numbers]
    for i, j in bonds:
        neighbours[i].append(j)
        neighbours[j].append(i)
    colours = list(numbers)
    classes = len(set(colours))
    while True:
        # Hashes of tuples of integers are the same in every process, those of text are not.
        finer = [hash((colours[i], *sorted([colours[j] for j in near]))) for i, near in enumerate(neighbours)]
        if (count := len(set(finer))) == classes:
            return tuple(sorted(finer)), _fragment_sizes(neighbours)
        colours, classes = finer, count


def mappings(first: Pattern, second: Pattern, limit: int) -> Iterator[tuple[int, ...]]:
    """Ways to lay the atoms of the second pattern on those of the first, at most ``limit`` of them.

    Each way gives, for every atom of the first pattern, the atom of the second that it stands for.
    """
    matcher = nx.isomorphism.GraphMatcher(
        _graph(first), _graph(second), node_match=lambda a, b: a["number"] == b["number"]
    )
    atoms = range(len(first.numbers))
    for found, _ in zip(matcher.isomorphisms_iter(), range(limit), strict=False):
        yield tuple(found[i] for i in atoms)


def selections(
    numbers: Sequence[int], pairs: Sequence[Bond], wanted: Pattern, firm: Collection[Bond], limit: int
) -> tuple[list[frozenset[Bond]], bool]:
    """Choices among possible bonds that are the wanted molecules.

    Parameters
    ----------
    numbers : sequence of int
        Atomic numbers.
    pairs : sequence of (int, int)
        Possible bonds, the firmest first.
    wanted : Pattern
        The molecules to make.
    firm : collection of (int, int)
        Those that need not be dropped where the limit leaves no time for it.
    limit : int
        Largest number of choices to try.

    Returns
    -------
    list of frozenset
        The choices that are the wanted molecules, those that drop the weakest bonds first.
    bool
        Whether the limit left choices untried that drop bonds which are not firm.
    """
    by_kind: dict[Kind, list[Bond]] = {kind: [] for kind, _ in wanted.kinds}
    for pair in pairs:
        if (kind := kind_of(numbers, pair)) in by_kind:
            by_kind[kind].append(pair)
    surplus = {kind: len(by_kind[kind]) - count for kind, count in wanted.kinds}
    if any(number < 0 for number in surplus.values()):
        return [], False
    doubtful = {kind: members if surplus[kind] else [] for kind, members in by_kind.items()}
    untried = False
    while prod(comb(len(doubtful[kind]), surplus[kind]) for kind in doubtful) > limit:
        largest = max(doubtful, key=lambda kind: (comb(len(doubtful[kind]), surplus[kind]), kind))
        untried = untried or doubtful[largest][0] not in firm
        doubtful[largest] = doubtful[largest][1:]
    everything = frozenset(pair for members in by_kind.values() for pair in members)
    dropped = [list(combinations(reversed(doubtful[kind]), surplus[kind])) for kind in sorted(doubtful)]
    found = []
    for parts in product(*dropped):
        chosen = everything.difference(*parts)
        if signature(numbers, chosen) == wanted.signature:
            found.append(chosen)
    return found, untried


def _fragment_sizes(neighbours: list[list[int]]) -> tuple[int, ...]:
    seen = [False] * len(neighbours)
    sizes = []
    for start in range(len(neighbours)):
        if seen[start]:
            continue
        seen[start] = True
        stack, size = [start], 0
        while stack:
            size += 1
            for j in neighbours[stack.pop()]:
                if not seen[j]:
                    seen[j] = True
                    stack.append(j)
        sizes.append(size)
    return tuple(sorted(sizes))


def _graph(molecules: Pattern) -> nx.Graph:
    graph = nx.Graph()
    graph.add_nodes_from((i, {"number": number}) for i, number in enumerate(molecules.numbers))
    graph.add_edges_from(sorted(molecules.bonds))
    return graph
