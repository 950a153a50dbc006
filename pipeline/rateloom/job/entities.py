"""Species and transition states: from entries to records."""

import os
from functools import cache
from itertools import combinations

from rateloom.job.model import Entity, FrequencyScale, Given, Place
from rateloom.job.problems import Problems, suggestion
from rateloom.job.schema import EntityEntry, GivenEntry
from rateloom.job.settings import scale_of
from rateloom.job.tree import Block
from rateloom.job.validate import Source

TRANSITION_STATE = "transition_state"
_SAME_PLACE = 0.1  # angstrom: no two nuclei come as near
_MOST_ATOMS = 500


def entity_of(
    name: str, kind: str, source: Source, folder: str, scale: FrequencyScale, problems: Problems
) -> Entity | None:
    """Make a record; ``folder`` holds the calculations, ``scale`` is the job's. None where an entry is at fault."""
    part = source.part("given")
    entry = (source.without("given") if part else source).validate(EntityEntry, problems)
    numbers = part.validate(GivenEntry, problems) if part else None
    _check_sources(kind, source, problems)
    given = _given(kind, numbers, part, problems) if part and numbers else None
    if entry is None:
        return None
    if given:
        _check_isotopes(entry.isotopes, given.atoms, source, problems)
    return Entity(
        name=name,
        kind=kind,
        place=Place(source.file, source.line),
        frequencies=_path(folder, entry.frequencies),
        energy=_path(folder, entry.energy),
        given=given,
        charge=entry.charge,
        multiplicity=entry.multiplicity,
        symmetry_number=entry.symmetry_number,
        optical_isomers=entry.optical_isomers,
        isotopes=tuple(sorted(entry.isotopes.items())),
        electronic_levels=tuple(entry.electronic_levels) if entry.electronic_levels else None,
        spin_orbit_lowering=entry.spin_orbit_lowering,
        frequency_scale=scale_of(entry.frequency_scale, scale),
        accept=tuple(sorted(entry.accept.items())),
    )


def _path(folder: str, name: str | None) -> str | None:
    return None if name is None else os.path.normpath(os.path.join(folder, name))  # noqa: PTH118 - pathlib costs a second at 10000 files


def _check_sources(kind: str, source: Source, problems: Problems) -> None:
    tree = source.tree
    if not isinstance(tree, Block):
        return  # told already
    files = [key for key in ("frequencies", "energy") if key in tree.lines]
    if "given" in tree.lines:
        for key in files:
            message = "an output file stands beside 'given'"
            source.tell(problems, (key,), message, "Keep the file or the given numbers, not both.")
    elif not files or (kind == TRANSITION_STATE and files == ["energy"]):
        has = "only an energy" if files else "no calculation"
        advice = "Add 'frequencies: <output file>', or the numbers themselves under 'given'."
        source.tell(problems, (), f"there is {has} here", advice)


def _check_isotopes(isotopes: dict[int, str], atoms: tuple[str, ...], source: Source, problems: Problems) -> None:
    for number, label in isotopes.items():
        element = "H" if label in ("D", "T") else label.lstrip("0123456789")
        fault = ""
        if number > len(atoms):
            fault = f"there is no atom {number}, only {len(atoms)}"
        elif atoms[number - 1] != element:
            fault = f"atom {number} is {atoms[number - 1]}, not {element}"
        if fault:
            source.tell(problems, ("isotopes", str(number)), fault, "Atoms are counted from 1.")


def _given(kind: str, entry: GivenEntry, source: Source, problems: Problems) -> Given:
    atoms = tuple(atom[0] for atom in entry.geometry)
    for index, element in enumerate(atoms):
        if element not in _elements():
            advice = suggestion(element, _elements()) or "Write the symbol of an element such as Cl."
            source.tell(problems, ("geometry", index, 0), f"{element[:20]!r} is no element", advice)
    _check_frequencies(kind, entry.frequencies, len(atoms), source, problems)
    positions = tuple((x, y, z) for _, x, y, z in entry.geometry)
    _check_distances(positions, source, problems)
    return Given(
        energy_hartree=entry.energy,
        frequencies_per_cm=tuple(sorted(entry.frequencies)),
        atoms=atoms,
        geometry_angstrom=positions,
        charge=entry.charge,
        multiplicity=entry.multiplicity,
        level=entry.level,
    )


def _check_frequencies(kind: str, values: list[float], n_atoms: int, source: Source, problems: Problems) -> None:
    key, found = ("frequencies",), len(values)
    wanted = (0,) if n_atoms == 1 else (1,) if n_atoms == 2 else (3 * n_atoms - 6, 3 * n_atoms - 5)
    if found not in wanted:
        listed = f"{wanted[0]} ({wanted[1]} if linear)" if len(wanted) == 2 else str(wanted[0])
        message = f"there are {found} frequencies, but {n_atoms} atoms have {listed}"
        source.tell(problems, key, message, "Give all vibrations, without translations and rotations.")
    for index, value in enumerate(values):
        if value == 0.0:
            source.tell(
                problems, (*key, index), "a vibration has no frequency of 0", "Leave out translations and rotations."
            )
    if kind == TRANSITION_STATE and values and min(values) >= 0:
        message = "no frequency of this transition state is imaginary"
        source.tell(problems, key, message, "Write the imaginary one as a negative number.")


def _check_distances(positions: tuple[tuple[float, float, float], ...], source: Source, problems: Problems) -> None:
    key = ("geometry",)
    if len(positions) > _MOST_ATOMS:
        source.tell(
            problems, key, f"there are more than {_MOST_ATOMS} atoms", "Read such a molecule from an output file."
        )
        return
    for (i, one), (j, other) in combinations(enumerate(positions), 2):
        if sum((a - b) ** 2 for a, b in zip(one, other, strict=True)) < _SAME_PLACE**2:
            message = f"atoms {i + 1} and {j + 1} lie at one place"
            source.tell(problems, (*key, j), message, "Correct the coordinates.")


@cache
def _elements() -> frozenset[str]:
    from periodictable import elements  # needed for given geometries alone

    return frozenset(element.symbol for element in elements if element.number > 0)
