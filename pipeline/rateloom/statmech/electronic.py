"""Electronic levels of one species: the job file's, else built-in ones for an atom, else spin alone."""

from dataclasses import dataclass

from scipy.constants import c, centi, h

from rateloom.remarks import Remark
from rateloom.statmech.choices import Choices
from rateloom.statmech.levels import Composition, GroundTerm, ground_term, partition_above_mean

_PER_CM = h * c / centi  # J
_ROOM = 298.15  # K: where a message says how much a choice matters


@dataclass(frozen=True, slots=True, kw_only=True)
class Electronic:
    """Levels and lowering taken, and where they come from."""

    levels: tuple[tuple[int, float], ...]
    """(degeneracy, energy above the lowest level [J]), ascending."""
    lowering: float
    """[J]"""
    levels_source: str
    lowering_source: str


def electronic_levels(
    composition: Composition, charge: int, multiplicity: int, choices: Choices
) -> tuple[Electronic, tuple[Remark, ...]]:
    """Choose the electronic levels and the spin-orbit lowering of a species.

    Parameters
    ----------
    composition : tuple of (str, int)
        Element symbols and counts, ascending [1].
    charge : int
        Charge [e].
    multiplicity : int
        Spin multiplicity of the calculation [1].
    choices : Choices
        What the job file says.

    Returns
    -------
    Electronic
        Levels [J] and lowering [J].
    tuple of Remark
        ``fine-structure-available``, ``not-the-ground-term`` or ``no-fine-structure-data``.

    References
    ----------
    .. [1] Levels: each entry of ``rateloom.statmech.levels`` names its source.
    """
    term = ground_term(composition, charge)
    is_atom = sum(count for _, count in composition) == 1
    usable = term if term is not None and term.multiplicity == multiplicity else None
    default = usable if is_atom else None
    taken = Electronic(
        levels=default.levels if default else ((multiplicity, 0.0),),
        lowering=default.lowering if default else 0.0,
        levels_source=f"ground term {default.term}: {default.source}" if default else "spin multiplicity alone",
        lowering_source=f"mean of the term {default.term}: {default.source}" if default else "none",
    )
    taken = _overridden(taken, choices)
    if is_atom and choices.electronic_levels is None and usable is None:
        return taken, (_atom_without_levels(composition[0][0], charge, multiplicity, term),)
    if not is_atom and usable is not None and None in (choices.electronic_levels, choices.spin_orbit_lowering):
        return taken, (_offer(usable, taken, choices),)
    return taken, ()


def _overridden(taken: Electronic, choices: Choices) -> Electronic:
    levels, levels_source = taken.levels, taken.levels_source
    if choices.electronic_levels is not None:
        lowest = min(energy for _, energy in choices.electronic_levels)
        levels = tuple((degeneracy, energy - lowest) for degeneracy, energy in choices.electronic_levels)
        levels_source = "job file"
    lowering, lowering_source = taken.lowering, taken.lowering_source
    if choices.spin_orbit_lowering is not None:
        lowering, lowering_source = choices.spin_orbit_lowering, "job file"
    return Electronic(levels=levels, lowering=lowering, levels_source=levels_source, lowering_source=lowering_source)


def _atom_without_levels(symbol: str, charge: int, multiplicity: int, term: GroundTerm | None) -> Remark:
    kept = f"One level with degeneracy {multiplicity} is used; give electronic_levels and spin_orbit_lowering."
    if term is not None:
        message = (
            f"The multiplicity {multiplicity} is not that of the ground term {term.term} of {symbol}, so that the "
            f"built-in fine structure does not apply. {kept}"
        )
        return Remark("not-the-ground-term", message, value=str(multiplicity), limit=str(term.multiplicity))
    name = f"{symbol} of charge {charge:+d}" if charge else symbol
    return Remark("no-fine-structure-data", f"There are no built-in levels for the atom {name}. {kept}")


def _offer(term: GroundTerm, taken: Electronic, choices: Choices) -> Remark:
    lines = []
    if choices.electronic_levels is None:
        levels = ", ".join(f"[{degeneracy}, {energy:g} cm-1]" for degeneracy, energy in term.levels_per_cm)
        lines.append(f"electronic_levels: [{levels}]")
    if choices.spin_orbit_lowering is None:
        lines.append(f"spin_orbit_lowering: {term.lowering / _PER_CM:.6g} cm-1")
    now = partition_above_mean(taken.levels, taken.lowering, _ROOM)
    then = partition_above_mean(
        term.levels if choices.electronic_levels is None else taken.levels,
        term.lowering if choices.spin_orbit_lowering is None else taken.lowering,
        _ROOM,
    )
    message = (
        f"The ground term {term.term} has fine structure that is not used. To use it, write "
        f"{' and '.join(f'`{line}`' for line in lines)}; at 298.15 K this multiplies the rate coefficient of a "
        f"reaction that consumes one such molecule by {now / then:.3g}. "
        f"Source: {term.source}."
    )
    return Remark("fine-structure-available", message, value=f"factor {now / then:.3g} at 298.15 K")
