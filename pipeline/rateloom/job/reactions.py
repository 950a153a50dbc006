"""Reactions: from entries to records, and whether the species and transition states they name exist."""

from collections.abc import Mapping
from dataclasses import dataclass

from rateloom.job.model import Place, Reaction
from rateloom.job.names import Equation, parse_equation
from rateloom.job.problems import Fault, Problems, nearest
from rateloom.job.schema import FitEntry, ReactionEntry
from rateloom.job.settings import fit_of, temperatures_of
from rateloom.job.validate import Source


@dataclass(frozen=True, slots=True)
class Defaults:
    """What holds for a reaction that says nothing else."""

    temperatures: tuple[float, ...]
    tunnelling: str
    fit: FitEntry | None


@dataclass(frozen=True, slots=True)
class Known:
    """Names that reactions may use, each with its place; None where a file that may define more was unreadable."""

    species: Mapping[str, Place]
    transition_states: Mapping[str, Place]
    complete: bool


def reaction_of(name: str, source: Source, defaults: Defaults, known: Known, problems: Problems) -> Reaction | None:
    """Make a record; None where the entry or its equation cannot be used."""
    entry = source.validate(ReactionEntry, problems)
    equation = _equation(source, problems)
    if equation is not None:
        _check_species(equation, source, known, problems)
    _check_transition_states(source, known, problems)
    if entry is None or equation is None:
        return None
    own = entry.temperatures
    return Reaction(
        name=name,
        place=Place(source.file, source.line),
        equation=equation.text,
        reactants=equation.reactants,
        products=equation.products,
        transition_states=tuple(entry.transition_state),
        tunnelling=entry.tunnelling or defaults.tunnelling,
        temperatures=defaults.temperatures if own is None else temperatures_of(own),
        fit=fit_of(defaults.fit, entry.fit),
        path_degeneracy=entry.path_degeneracy,
        accept=tuple(sorted(entry.accept.items())),
    )


def _equation(source: Source, problems: Problems) -> Equation | None:
    for path, text in source.texts("equation"):
        if path == ("equation",) and text.strip():
            try:
                return parse_equation(text)
            except Fault as error:
                source.tell(problems, path, error.message, error.advice)
    return None


def _check_species(equation: Equation, source: Source, known: Known, problems: Problems) -> None:
    for name in dict.fromkeys(equation.reactants + equation.products):
        if name not in known.species and known.complete:
            advice = _advice(name, known.species, source, ("equation",), "species", problems)
            parts = name.split("+")
            if len(parts) > 1 and all(part in known.species for part in parts):
                advice = f"Write '{' + '.join(parts)}': a plus sign needs a blank on both sides."
            elif (bare := name.lstrip("0123456789")) in known.species:
                advice = f"Write '{name[: -len(bare)]} {bare}': a blank parts number and name."
            source.tell(problems, ("equation",), f"no species is called {name!r}", advice)


def _check_transition_states(source: Source, known: Known, problems: Problems) -> None:
    seen: set[str] = set()
    for path, text in source.texts("transition_state"):
        name = " ".join(text.split())
        if name in seen:
            source.tell(problems, path, f"{name!r} stands twice in the list", "Remove one of them.")
        elif name and name not in known.transition_states and known.complete:
            advice = _advice(name, known.transition_states, source, path, "transition_states", problems)
            source.tell(problems, path, f"no transition state is called {name!r}", advice)
        seen.add(name)


def _advice(
    name: str,
    places: Mapping[str, Place],
    source: Source,
    path: tuple[str | int, ...],
    section: str,
    problems: Problems,
) -> str:
    """Name the closest one with its line, and both ways out."""
    closest = None if problems.many else nearest(name, places)
    line = source.line_of(path)
    add = f"add {name!r} under {section}."
    if closest is None:
        return f"Correct line {line}, or {add}"
    place = places[closest]
    where = f"line {place.line}" if place.file == source.file else f"{place.file}:{place.line}"
    return f"Closest: {closest!r} ({where}). Correct line {line}, or {add}"
