"""Element symbols and standard masses of the most abundant isotopes."""

import periodictable

GHOST = "X"
"""A centre without a nucleus."""


def symbol(number: int) -> str:
    """Give the symbol of an atomic number; 0 is a centre without a nucleus."""
    return GHOST if number <= 0 else str(periodictable.elements[number].symbol)


def electrons(atom: str) -> int:
    """Give the atomic number of a symbol."""
    return int(periodictable.elements.symbol(atom).number)


def mass(atom: str) -> float:
    """Give the mass of the most abundant isotope [u]."""
    if atom == GHOST:
        return 0.0
    element = periodictable.elements.symbol(atom)
    isotopes = [element[number] for number in element.isotopes]
    best = max(isotopes, key=lambda isotope: (isotope.abundance or 0.0, -isotope.isotope))
    return float(best.mass if best.abundance else element.mass)
