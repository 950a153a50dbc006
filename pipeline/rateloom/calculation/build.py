"""From what was found in an output to one record: which job of several counts, and what belongs to it."""

from dataclasses import dataclass

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation import elements
from rateloom.calculation.checks import check
from rateloom.calculation.energies import choose, inside, printed_energies, within
from rateloom.calculation.frequencies import FrequencySet, complete, frequency_sets, leaves_one_out, vibrations
from rateloom.calculation.motion import count_rigid, same_shape
from rateloom.calculation.normal_modes import modes_of_hessian
from rateloom.calculation.output import Output
from rateloom.calculation.programs import Program
from rateloom.calculation.programs.program import GHZ_PER_CM, last_group, number, positions
from rateloom.calculation.programs.search import matches
from rateloom.calculation.record import Calculation, Level
from rateloom.calculation.track import Entry, Track
from rateloom.errors import CalculationError
from rateloom.remarks import Remark

SAME_GEOMETRY = 5e-4
"""Two printed geometries are one if no distance differs by more [angstrom]: the steps of a search are larger."""


@dataclass(frozen=True, slots=True)
class Choice:
    """The part of an output that the record is made of."""

    geometry: Entry
    chosen: FrequencySet | None
    sets: int
    """Number of complete sets of frequencies."""
    dropped: bool
    """A later set of frequencies is not complete."""


def build(output: Output, program: Program, track: Track) -> Calculation:
    """Make the record of an output.

    Raises
    ------
    CalculationError
        The output holds no geometry.
    """
    geometries = read_geometries(output, program, track)
    choice = choose_part(geometries, track)
    line = choice.chosen.end if choice.chosen else choice.geometry.end
    begin, end = congruent_span(output, geometries, choice.geometry)
    here = kept(output, program, begin, end)
    atoms, masses, printed = read_atoms(here, program, track, choice)
    real = np.array([symbol != elements.GHOST for symbol in atoms], dtype=bool)
    geometry = np.array(choice.geometry.value, dtype=np.float64)[real]
    atoms, masses = tuple(symbol for symbol in atoms if symbol != elements.GHOST), masses[real]

    found = printed_energies(output, program, track)
    energies = within(found, begin, end) or within(found, 0, begin)
    kind, reason = choose(list(energies))
    place = energies[kind].position if kind else output.position(line)
    hessian = read_hessian(output.text[: output.position(line + 1)], program, masses) if choice.chosen else None
    frequencies, displacements, computed = read_modes(choice.chosen, hessian, geometry, masses)
    optimised, converged = optimisation(output, program, geometries)
    broken = track.cut or choice.dropped
    record = Calculation(
        program=program.name,
        program_version=version(output.text, program, track),
        level=program.level(output.text[:place], kind, track.metadata) if kind else Level(),
        charge=int(track.last("charge", line) or 0),
        multiplicity=multiplicity(output.text, program, track, line),
        atoms=atoms,
        geometry_angstrom=geometry,
        masses_u=masses if printed else None,
        energies_hartree={name: energies[name].value for name in sorted(energies)},
        energy_kind=kind,
        energy_reason=reason,
        frequencies_per_cm=frequencies,
        displacements=displacements,
        hessian=hessian,
        rotational_constants_per_cm=rotational_constants(here, program, track, line),
        spin_squared=spin_squared(here, program),
        largest_gradient=largest_gradient(here, program),
        optimised_geometry_angstrom=None if optimised is None else optimised[real],
        converged=converged,
        finished=ended_normally(output.text, program) and not broken,
        remarks=(*several_jobs(choice), *computed, *(program.caution(output.text) if program.caution else ())),
    )
    return check(record, cut=broken, charge_printed=bool(track.entries["charge"]))


def read_geometries(output: Output, program: Program, track: Track) -> list[Entry]:
    """Give the geometries in the order of the file, those of a numerical differentiation left out."""
    spans = program.displaced(output.text) if program.displaced else []
    geometries = [
        entry
        for entry in track.geometries()
        if not inside(spans, output.position(entry.begin)) and is_geometry(entry.value)
    ]
    if geometries:
        return geometries
    advice = program.no_geometry_advice or "Compute with the geometry printed, or take the whole output."
    where = "is cut short before its geometry" if track.cut else "prints no geometry"
    msg = f"{output.name}: this {program.name} output {where}, so that nothing can be made of it. {advice}"
    raise CalculationError(msg)


def is_geometry(value: object) -> bool:
    """Tell whether a value holds three numbers an atom, as in a whole and undamaged table."""
    try:
        array = np.array(value, dtype=np.float64)
    except (TypeError, ValueError):
        return False
    return array.ndim == 2 and array.shape[1] == 3 and len(array) > 0 and bool(np.isfinite(array).all())


def choose_part(geometries: list[Entry], track: Track) -> Choice:
    """Choose the last complete set of frequencies with its geometry, else the last geometry."""
    atoms = len(geometries[-1].value)
    sets = frequency_sets(track, atoms)
    whole = []
    for candidate in sets:
        geometry = geometry_of(candidate, geometries)
        positions_ = np.array(geometry.value, dtype=np.float64)
        if complete(len(candidate.frequencies), len(positions_), count_rigid(positions_)):
            whole.append((candidate, geometry))
    last_incomplete = bool(sets) and (not whole or sets[-1] is not whole[-1][0])
    if whole:
        return Choice(whole[-1][1], whole[-1][0], len(whole), last_incomplete and track.cut)
    if sets:
        return Choice(geometry_of(sets[-1], geometries), sets[-1], 1, track.cut)
    return Choice(geometries[-1], None, 0, False)


def geometry_of(chosen: FrequencySet, geometries: list[Entry]) -> Entry:
    """Give the last geometry printed before a set of frequencies, else the first after it."""
    before = [entry for entry in geometries if entry.begin < chosen.begin]
    return before[-1] if before else geometries[0]


def read_atoms(here: str, program: Program, track: Track, choice: Choice) -> tuple[tuple[str, ...], FloatArray, bool]:
    """Give element symbols and masses, and whether these are printed; else they are of the most abundant isotopes."""
    count = len(choice.geometry.value)
    numbers = [int(value) for value in track.last("atomnos", choice.geometry.end)]
    atoms = tuple(elements.symbol(value) for value in numbers[:count])
    printed = [number(match.group(1)) for match in matches(program.masses, here)][-count:] if program.masses else []
    if not printed:
        printed = track.last("atommasses", choice.chosen.end if choice.chosen else choice.geometry.end)
    if printed is not None and len(printed) == count and all(value > 0 for value in printed):
        return atoms, np.array(printed, dtype=np.float64), True
    return atoms, np.array([elements.mass(symbol) for symbol in atoms]), False


def read_modes(
    chosen: FrequencySet | None, hessian: FloatArray | None, geometry: FloatArray, masses: FloatArray
) -> tuple[FloatArray | None, FloatArray | None, tuple[Remark, ...]]:
    """Give the vibrations of the chosen set, computed from the Hessian where the program left one out."""
    if chosen is None:
        return None, None, ()
    if hessian is None or not leaves_one_out(chosen, geometry):
        return *vibrations(chosen, geometry, masses), ()
    frequencies, displacements = modes_of_hessian(hessian, geometry, masses)
    message = (
        "The program took six motions out of a geometry that is linear within 0.03 angstrom, one a vibration; "
        "the frequencies are computed from the Hessian it prints. Compute with the geometry exactly linear."
    )
    return frequencies, displacements, (Remark("frequencies-from-hessian", message, "6", "5"),)


def congruent_span(output: Output, geometries: list[Entry], chosen: Entry) -> tuple[int, int]:
    """Give the part of the text in which the chosen geometry, in any frame, is the last one printed."""
    index = next(number for number, entry in enumerate(geometries) if entry is chosen)
    reference = np.array(chosen.value, dtype=np.float64)

    def same(entry: Entry) -> bool:
        return same_shape(np.array(entry.value, dtype=np.float64), reference, SAME_GEOMETRY)

    first = index
    while first > 0 and same(geometries[first - 1]):
        first -= 1
    last = index
    while last + 1 < len(geometries) and same(geometries[last + 1]):
        last += 1
    begin = output.position(geometries[first].begin) if first else 0
    end = output.position(geometries[last + 1].begin) if last + 1 < len(geometries) else len(output.text)
    return begin, end


def kept(output: Output, program: Program, begin: int, end: int) -> str:
    """Give a part of the text without the displaced geometries of a numerical differentiation."""
    parts, start = [], begin
    for first, last in program.displaced(output.text) if program.displaced else []:
        if first < end and last > start:
            parts.append(output.text[start : max(first, start)])
            start = last
    return "".join([*parts, output.text[start:end]])


def version(text: str, program: Program, track: Track) -> str:
    """Give the version of the last run in a file."""
    return last_group(program.version, text) if program.version else str(track.metadata.get("package_version", ""))


def multiplicity(text: str, program: Program, track: Track, line: int) -> int:
    """Give the spin multiplicity."""
    printed = program.multiplicity(text) if program.multiplicity else None
    return int(printed or track.last("mult", line) or 1)


def several_jobs(choice: Choice) -> tuple[Remark, ...]:
    """Say which of several sets of frequencies was taken."""
    if choice.chosen is None or choice.sets < 2:
        return ()
    message = (
        f"The output holds {choice.sets} complete sets of frequencies; the last one is taken (line "
        f"{choice.chosen.begin}) with the geometry printed before it (line {choice.geometry.begin}). "
        "Split the output if another one is meant."
    )
    return (Remark("several-jobs", message, str(choice.sets), "1"),)


def ended_normally(text: str, program: Program) -> bool:
    """Tell whether the last job of a file ended normally."""
    ends = positions(program.ends, text)
    if not ends:
        return False
    begins, fails = positions(program.begins, text), positions(program.fails, text)
    return ends[-1] > max((*begins, -1)) and ends[-1] > max((*fails, -1))


def optimisation(output: Output, program: Program, geometries: list[Entry]) -> tuple[FloatArray | None, bool | None]:
    """Give the geometry in which the last optimisation ended and whether it converged."""
    if program.ends_of_search:
        ends = program.ends_of_search(output.text)
    else:
        ends = [(place, True) for place in positions(program.converged, output.text)]
        ends += [(place, False) for place in positions(program.not_converged, output.text)]
    if not ends:
        return None, None
    place, good = max(ends)
    line = output.line(place)
    before = [entry for entry in geometries if entry.begin <= line]
    entry = before[-1] if before else geometries[0]
    after = next((other for other in geometries if other.begin > line), None)
    if after is not None and program.geometry_follows:
        entry = after
    return np.array(entry.value, dtype=np.float64), good


def rotational_constants(text: str, program: Program, track: Track, line: int) -> FloatArray | None:
    """Give the rotational constants, descending [cm-1]."""
    if program.rotational_constants:
        values = program.rotational_constants(text)
    else:
        printed = track.last("rotconsts", line)
        values = None if printed is None or not len(printed) else np.ravel(np.array(printed[-1])) / GHZ_PER_CM
    if values is None:
        return None
    values = values[np.isfinite(values) & (values > 0)]
    return np.sort(values)[::-1] if len(values) else None


def spin_squared(text: str, program: Program) -> float | None:
    """Give the last <S**2> printed at the geometry."""
    word = last_group(program.spin_squared, text) if program.spin_squared else ""
    return number(word) if word else None


def largest_gradient(text: str, program: Program) -> float | None:
    """Give the largest component of the last gradient printed at the geometry."""
    gradient = program.gradient(text) if program.gradient else None
    return None if gradient is None or not gradient.size else float(np.abs(gradient).max())


def read_hessian(text: str, program: Program, masses: FloatArray) -> FloatArray | None:
    """Give the last Hessian printed up to the frequencies [hartree/bohr2]."""
    matrix = program.hessian(text) if program.hessian else None
    if matrix is None or matrix.shape != (3 * len(masses), 3 * len(masses)) or not np.isfinite(matrix).all():
        return None
    if program.hessian_is_mass_weighted:
        roots = np.sqrt(np.repeat(masses, 3))
        return matrix * np.outer(roots, roots) * 1e-3
    return matrix
