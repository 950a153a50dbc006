"""The tables of numbers: their headers, and the rows of one reaction or species.

Rows are text, so that a stage can write those of one reaction once and a table is the rows of all in a row.
"""

from collections.abc import Iterable

from scipy.constants import kilo

from rateloom.fits import Fit
from rateloom.output.numbers import Cell, rows_text
from rateloom.output.units import concentration_unit, rate_unit
from rateloom.rates import ReactionRates
from rateloom.statmech import Thermochemistry

HEADERS: dict[str, tuple[str, ...]] = {
    "rates.csv": (
        "reaction",
        "direction",
        "temperature_K",
        "rate_coefficient",
        "unit",
        "without_tunnelling",
        "tunnelling_factor",
    ),
    "arrhenius.csv": (
        "reaction",
        "direction",
        "form",
        "term",
        "A",
        "A_unit",
        "n",
        "E_kJ_per_mol",
        "T_min_K",
        "T_max_K",
        "max_deviation_percent",
        "rms_deviation_percent",
    ),
    "species.csv": (
        "species",
        "temperature_K",
        "Cp_J_per_mol_K",
        "S_J_per_mol_K",
        "H_minus_H0_kJ_per_mol",
        "G_minus_H0_kJ_per_mol",
    ),
    "equilibrium.csv": (
        "reaction",
        "temperature_K",
        "delta_H_kJ_per_mol",
        "delta_S_J_per_mol_K",
        "delta_G_kJ_per_mol",
        "K_p",
        "K_c",
        "K_c_unit",
    ),
}
"""By file name."""

DIRECTIONS = ("forward", "reverse")


def table(name: str, rows: Iterable[str]) -> bytes:
    """Put a header over rows of CSV."""
    return (rows_text([HEADERS[name]]) + "".join(rows)).encode()


def rate_rows(reaction: str, unit: str, orders: tuple[int, int], rates: ReactionRates) -> str:
    """Write the rate coefficients of a reaction, forward and then reverse.

    Parameters
    ----------
    reaction
        Its name.
    unit
        Unit of a bimolecular rate coefficient.
    orders
        Molecules on either side.
    rates
        In SI units.
    """
    rows: list[tuple[Cell, ...]] = []
    columns = ((rates.forward, rates.forward_without_tunnelling), (rates.reverse, rates.reverse_without_tunnelling))
    for direction, order, (with_it, without_it) in zip(DIRECTIONS, orders, columns, strict=True):
        name, size = rate_unit(unit, order)
        numbers = (rates.temperatures, with_it / size, without_it / size, rates.tunnelling_factors)
        for temperature, coefficient, bare, factor in zip(*(column.tolist() for column in numbers), strict=True):
            rows.append((reaction, direction, temperature, coefficient, name, bare, factor))
    return rows_text(rows)


def fit_rows(reaction: str, unit: str, orders: tuple[int, int], fits: tuple[Fit, Fit]) -> str:
    """Write the expressions of a reaction, forward and then reverse, a row a term."""
    rows: list[tuple[Cell, ...]] = []
    for direction, order, fit in zip(DIRECTIONS, orders, fits, strict=True):
        name, size = rate_unit(unit, order)
        span = (fit.lowest_temperature, fit.highest_temperature)
        deviations = (100.0 * fit.max_deviation, 100.0 * fit.rms_deviation)
        for number, term in enumerate(fit.terms, start=1):
            parameters = (term.A / size, name, term.n, term.E / kilo)
            rows.append((reaction, direction, fit.form, number, *parameters, *span, *deviations))
    return rows_text(rows)


def equilibrium_rows(reaction: str, unit: str, orders: tuple[int, int], rates: ReactionRates) -> str:
    """Write the equilibrium of a reaction."""
    name, size = concentration_unit(unit, orders[1] - orders[0])
    numbers = (
        rates.temperatures,
        rates.delta_H / kilo,
        rates.delta_S,
        rates.delta_G / kilo,
        rates.K_p,
        rates.K_c / size,
    )
    rows = zip(*(column.tolist() for column in numbers), strict=True)
    return rows_text((reaction, *row, name or "1") for row in rows)


def species_rows(species: str, functions: Thermochemistry) -> str:
    """Write the thermochemistry of a species."""
    numbers = (
        functions.temperatures,
        functions.heat_capacity,
        functions.entropy,
        functions.enthalpy / kilo,
        functions.gibbs_energy / kilo,
    )
    return rows_text((species, *row) for row in zip(*(column.tolist() for column in numbers), strict=True))
