"""Stages: results to the rows that stand for them in the tables."""

from dataclasses import dataclass

from rateloom.batch.stages.fit import FitPair
from rateloom.batch.stages.partition import Tabulated
from rateloom.engine import Outcome
from rateloom.output import equilibrium_rows, fit_rows, rate_rows, species_rows
from rateloom.rates import ReactionRates


@dataclass(frozen=True, slots=True)
class ReactionRowsRequest:
    """Whose rows, in which unit."""

    reaction: str
    rate_unit: str
    reactants: int
    """How many molecules react forward."""
    products: int


@dataclass(frozen=True, slots=True)
class ReactionRows:
    """CSV text without headers."""

    rates: str
    arrhenius: str
    equilibrium: str


@dataclass(frozen=True, slots=True)
class SpeciesRowsRequest:
    """Whose rows."""

    species: str


@dataclass(frozen=True, slots=True)
class SpeciesRows:
    """CSV text without a header."""

    species: str


def write_reaction(request: ReactionRowsRequest, rates: ReactionRates | None, fits: FitPair | None) -> Outcome:
    """Write the rows of a reaction."""
    if rates is None or fits is None:
        return Outcome(None)
    name, unit, orders = request.reaction, request.rate_unit, (request.reactants, request.products)
    return Outcome(
        ReactionRows(
            rate_rows(name, unit, orders, rates),
            fit_rows(name, unit, orders, (fits.forward, fits.reverse)),
            equilibrium_rows(name, unit, orders, rates),
        )
    )


def write_species(request: SpeciesRowsRequest, table: Tabulated | None) -> Outcome:
    """Write the rows of a species."""
    return Outcome(None if table is None else SpeciesRows(species_rows(request.species, table.thermochemistry)))
