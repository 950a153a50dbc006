"""Masses of atoms: of the most abundant isotope unless the job file or the program that ran says another.

Taking the most abundant isotope is the habit of quantum-chemistry programs; a program that prints average atomic
weights instead is recognised, and its averages are not taken for isotopes.
"""

import re
from functools import cache

import numpy as np
import periodictable
from scipy.constants import atomic_mass

from rateloom.arrays import FloatArray
from rateloom.remarks import Remark

SAME_ISOTOPE = 0.3
"""Largest difference [u] between masses that stand for the same isotope."""
_RECOGNISED = 0.02  # u: a printed mass this near to an isotope's is that isotope; averages are farther off
_LABEL = re.compile(r"(\d+)([A-Z][a-z]?)")
_HEAVY_HYDROGEN = {"D": 2, "T": 3}
_TRACERS = {("H", 3), ("C", 14)}  # not abundant, yet calculated


def atomic_number(symbol: str) -> int:
    """Nuclear charge of an element.

    Parameters
    ----------
    symbol : str
        Element symbol, e.g. ``Cl``.

    Returns
    -------
    int
        Atomic number [1].

    Raises
    ------
    ValueError
        There is no such element.

    References
    ----------
    .. [1] The table of the periodictable library.
    """
    return int(_element(symbol).number)


@cache
def isotope_mass(symbol: str, label: str = "") -> float:
    """Mass of one isotope of an element.

    Parameters
    ----------
    symbol : str
        Element symbol.
    label : str
        ``D``, ``T`` or mass number and symbol such as ``13C``; the most abundant isotope where empty.

    Returns
    -------
    float
        Mass [u].

    Raises
    ------
    ValueError
        There is no such element, or the label names no isotope of it.

    References
    ----------
    .. [1] Isotopic masses and abundances of the periodictable library (atomic mass evaluation; IUPAC).
    """
    element = _element(symbol)
    if not label:
        return float(element[_most_abundant(symbol)].mass)
    number = _mass_number(symbol, label)
    if number not in element.isotopes:
        msg = f"no isotope {label} is known; choose a mass number such as {_most_abundant(symbol)}{symbol}"
        raise ValueError(msg)
    return float(element[number].mass)


def atomic_masses(atoms: tuple[str, ...], isotopes: tuple[tuple[int, str], ...] = ()) -> FloatArray:
    """Masses of the atoms of a molecule.

    Parameters
    ----------
    atoms : tuple of str
        Element symbols.
    isotopes : tuple of (int, str)
        Atom number, counted from 1, and isotope label; all other atoms are of the most abundant isotope.

    Returns
    -------
    ndarray, shape (n_atoms,)
        Masses [kg].

    Raises
    ------
    ValueError
        An element, an atom number or an isotope does not exist.

    References
    ----------
    .. [1] Isotopic masses of the periodictable library.
    """
    chosen = _by_atom(atoms, isotopes)
    masses = [isotope_mass(symbol, chosen.get(number, "")) for number, symbol in enumerate(atoms, start=1)]
    return np.array(masses) * atomic_mass


def isotope_labels(atoms: tuple[str, ...], isotopes: tuple[tuple[int, str], ...] = ()) -> tuple[str, ...]:
    """Names that tell isotopes apart: the element symbol for the most abundant one, ``D``, ``T``, ``13C`` for others.

    Parameters
    ----------
    atoms : tuple of str
        Element symbols.
    isotopes : tuple of (int, str)
        Atom number, counted from 1, and isotope label [1].

    Returns
    -------
    tuple of str
        One name per atom; equal names are equal atoms, however the isotope was written.

    Raises
    ------
    ValueError
        An element, an atom number or an isotope does not exist.

    References
    ----------
    .. [1] Isotopic abundances of the periodictable library.
    """
    chosen = _by_atom(atoms, isotopes)
    return tuple(_name(symbol, chosen.get(number, "")) for number, symbol in enumerate(atoms, start=1))


def printed_isotopes(
    atoms: tuple[str, ...], masses_u: FloatArray | None
) -> tuple[tuple[tuple[int, str], ...], tuple[Remark, ...]]:
    """Isotopes that a program's printed masses stand for, where they are not the most abundant ones.

    Parameters
    ----------
    atoms : tuple of str
        Element symbols.
    masses_u : ndarray, shape (n_atoms,), or None
        Masses as printed [u].

    Returns
    -------
    tuple of (int, str)
        Atom number, counted from 1, and label of every other isotope found.
    tuple of Remark
        ``isotopes-from-output`` where there are any, ``masses-not-isotopic`` for a mass that is no isotope's.

    Raises
    ------
    ValueError
        There is no such element.

    References
    ----------
    .. [1] Isotopic masses of the periodictable library.
    """
    if masses_u is None or len(masses_u) != len(atoms):
        return (), ()
    found: list[tuple[int, str]] = []
    strange: list[str] = []
    for number, (symbol, mass) in enumerate(zip(atoms, masses_u.tolist(), strict=True), start=1):
        if abs(mass - isotope_mass(symbol)) <= SAME_ISOTOPE:
            continue
        label = _recognise(symbol, mass)
        if label:
            found.append((number, label))
        else:
            strange.append(f"{symbol}{number} {mass:.4f} u")
    return tuple(found), _mass_remarks(found, strange)


def _mass_remarks(found: list[tuple[int, str]], strange: list[str]) -> tuple[Remark, ...]:
    remarks = []
    if found:
        names = ", ".join(f"{number}: {label}" for number, label in found)
        message = f"The output was run with isotopes other than the most abundant ones ({names}); they are kept."
        remarks.append(Remark("isotopes-from-output", message, value=names))
    if strange:
        message = (
            "The output prints masses that belong to no isotope (perhaps averages): "
            f"{', '.join(strange)}. Its frequencies are kept; translation and rotation use the most abundant isotope."
        )
        remarks.append(Remark("masses-not-isotopic", message, value=strange[0], limit=f"{SAME_ISOTOPE} u"))
    return tuple(remarks)


def _element(symbol: str) -> periodictable.core.Element:
    try:
        element = periodictable.elements.symbol(symbol)
    except ValueError:
        element = None
    if element is None or element.number == 0 or symbol in _HEAVY_HYDROGEN:
        msg = f"there is no element {symbol!r}"
        raise ValueError(msg)
    return element


@cache
def _most_abundant(symbol: str) -> int:
    element = _element(symbol)
    if not element.isotopes:
        msg = f"no isotope of {symbol} is known"
        raise ValueError(msg)
    # Where nothing is abundant, the mass that the table gives the element is that of its longest-lived isotope.
    return int(max(element.isotopes, key=lambda n: (element[n].abundance or 0.0, -abs(n - element.mass))))


def _mass_number(symbol: str, label: str) -> int:
    match = _LABEL.fullmatch(label)
    element, number = (match[2], int(match[1])) if match else ("H", _HEAVY_HYDROGEN.get(label, 0))
    if not number:
        msg = f"{label!r} is no isotope: write D, T or mass number and symbol such as 13C"
        raise ValueError(msg)
    if element != symbol:
        msg = f"{label} is no isotope of {symbol}"
        raise ValueError(msg)
    return number


def _name(symbol: str, label: str) -> str:
    if not label:
        return symbol
    isotope_mass(symbol, label)  # refuses what does not exist
    number = _mass_number(symbol, label)
    if number == _most_abundant(symbol):
        return symbol
    heavy = {2: "D", 3: "T"}.get(number) if symbol == "H" else None
    return heavy or f"{number}{symbol}"


def _by_atom(atoms: tuple[str, ...], isotopes: tuple[tuple[int, str], ...]) -> dict[int, str]:
    for number, label in isotopes:
        if not 1 <= number <= len(atoms):
            msg = f"isotope {label} is set on atom {number}, but the atoms are numbered 1 to {len(atoms)}"
            raise ValueError(msg)
    return dict(isotopes)


def _recognise(symbol: str, mass: float) -> str:
    element = _element(symbol)
    for number in element.isotopes:
        likely = (element[number].abundance or 0.0) > 0 or (symbol, number) in _TRACERS
        if likely and abs(element[number].mass - mass) <= _RECOGNISED:
            return _name(symbol, f"{number}{symbol}")
    return ""
