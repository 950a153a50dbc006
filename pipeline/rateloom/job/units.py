"""Quantities of a job file: a number with or without a unit, turned into the unit of the records.

The spellings of every day are in tables, anything else is asked of pint. Unit texts are taken apart here and pint
sees single words only: its parser of expressions would work out ``K^9^9^9^9``.
"""

import math
import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cache
from types import MappingProxyType
from typing import Any

from scipy.constants import Avogadro, Planck, atm, bar, c, calorie, elementary_charge, physical_constants

from rateloom.job.problems import refuse

_HARTREE = physical_constants["Hartree energy"][0]  # J
_PER_CM = Planck * c * 100  # J
_BOHR = physical_constants["Bohr radius"][0] * 1e10  # angstrom
_NUMBER = re.compile(r"([+-]?(?:\d+\.?\d*|\.\d+)(?:[eEdD][+-]?\d+)?)\s*((?:[^\W\d]|[%/°]|1/).*)?", re.DOTALL)
_FACTOR = re.compile(r"([*/]?)\s*([^\W\d]+|%)(-?\d)?\s*")
_SPELLING = str.maketrans({"−": "-", "·": " ", "⋅": " ", "^": None, "⁻": "-", "¹": "1", "²": "2", "³": "3"})
_ENERGIES = MappingProxyType(
    {
        "J": 1.0,
        "hartree": _HARTREE,
        "Hartree": _HARTREE,
        "Eh": _HARTREE,
        "eV": elementary_charge,
        "kJ/mol": 1e3 / Avogadro,
        "kJ mol-1": 1e3 / Avogadro,
        "kcal/mol": 1e3 * calorie / Avogadro,
        "kcal mol-1": 1e3 * calorie / Avogadro,
        "cm-1": _PER_CM,
        "/cm": _PER_CM,
    }
)
_SPECTRAL = (("joule", 1.0), ("joule/mole", 1 / Avogadro), ("1/meter", Planck * c), ("hertz", Planck))


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of quantity and the unit its records use."""

    name: str
    default: str
    """Unit of a bare number."""
    example: str
    factors: Mapping[str, float]
    """Unit of the records per unit, by usual spelling."""
    references: tuple[tuple[str, float], ...]
    """Units as pint calls them that any unit of this kind converts to, each in units of the records."""


def _energy_kind(name: str, default: str, example: str, base: float) -> Kind:
    factors = {unit: 1.0 if joule == base else joule / base for unit, joule in _ENERGIES.items()}
    return Kind(name, default, example, factors, tuple((unit, value / base) for unit, value in _SPECTRAL))


TEMPERATURE = Kind("a temperature", "K", "300 K", {"K": 1.0}, (("kelvin", 1.0),))
PRESSURE = Kind("a pressure", "bar", "1 bar", {"bar": bar, "Pa": 1.0, "kPa": 1e3, "atm": atm}, (("pascal", 1.0),))
LENGTH = Kind(
    "a length", "angstrom", "1.09 angstrom", {"angstrom": 1.0, "Å": 1.0, "bohr": _BOHR}, (("angstrom", 1.0),)
)
RATIO = Kind("a ratio", "1", "5 %", {"%": 0.01}, (("dimensionless", 1.0),))
ENERGY = _energy_kind("an energy", "hartree", "-40.518 hartree", _HARTREE)
"""Electronic energy [hartree]."""
LEVEL = _energy_kind("an energy", "cm-1", "139.2 cm-1", 1.0)
"""Energy between levels [J]."""
FREQUENCY = _energy_kind("a frequency", "cm-1", "1580 cm-1", _PER_CM)
"""Wavenumber [cm-1]."""


def quantity(text: str, kind: Kind) -> float:
    """Turn a text such as ``300 K`` into a number in the unit of the records.

    Raises
    ------
    Fault
        It is no finite number, or the unit is unknown or of another kind.
    """
    number, unit = _split(text, kind)
    if not unit:
        unit = kind.default
    factor = kind.factors.get(unit) if unit != "1" else 1.0
    value = number * factor if factor is not None else _by_pint(number, unit, kind, text)
    if not math.isfinite(value):
        refuse(f"{text!r} is no finite number", _wanted(kind))
    return value


def plain_number(text: str) -> float:
    """Turn a text into a number without a unit.

    Raises
    ------
    Fault
        It is something else.
    """
    return quantity(text, _PLAIN)


_PLAIN = Kind("a number", "1", "0.98", {}, ())


def _split(text: str, kind: Kind) -> tuple[float, str]:
    text = text.strip()
    found = _NUMBER.fullmatch(text.replace("−", "-")) if len(text) <= 80 else None
    if found is None:
        refuse(f"{_short(text)} is no number", _wanted(kind))
    number = found[1].replace("d", "e").replace("D", "e")
    unit = (found[2] or "").replace("**", "").translate(_SPELLING)
    return float(number), " ".join(unit.split()).replace("1/", "/").replace(" / ", "/")


def _by_pint(number: float, unit: str, kind: Kind, text: str) -> float:
    registry = _registry()
    try:
        parsed = _product(unit, registry)
        fitting = [pair for pair in kind.references if parsed.is_compatible_with(pair[0])]
        value = float(registry.Quantity(number, parsed).to(fitting[0][0]).magnitude) if fitting else math.nan
    except Exception:  # pint raises many kinds, all meaning an unusable unit
        refuse(f"the unit {unit!r} of {_short(text)} is not known", _wanted(kind))
    if not fitting:
        refuse(f"{_short(text)} is not {kind.name}", _wanted(kind))
    return value * fitting[0][1]


def _product(unit: str, registry: Any) -> Any:
    """Multiply the words of a unit such as ``kJ mol-1``."""
    position, result = 0, None
    while position < len(unit):
        found = _FACTOR.match(unit, position)
        if found is None:
            raise ValueError(unit)
        power = int(found[3] or 1) * (-1 if found[1] == "/" else 1)
        factor = registry.Unit(found[2])
        factor = factor if power == 1 else factor**power
        result = factor if result is None else result * factor
        position = found.end()
    return result


@cache
def _registry() -> Any:
    import pint  # a third of a second, needed for unusual units alone

    return pint.UnitRegistry()


def _short(text: str) -> str:
    return repr(text if len(text) <= 40 else text[:37] + "...")


def _wanted(kind: Kind) -> str:
    bare = f"; a bare number is in {kind.default}" if kind.default != "1" else ""
    return f"Write {kind.name} such as '{kind.example}'{bare}."
