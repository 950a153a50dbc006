"""Units of rate coefficients and equilibrium constants in the tables."""

from scipy.constants import N_A, centi, deci

_VOLUMES = {
    "cm3 molecule-1 s-1": centi**3,
    "cm3 mol-1 s-1": centi**3 / N_A,
    "m3 mol-1 s-1": 1.0 / N_A,
    "L mol-1 s-1": deci**3 / N_A,
}
"""Volume per amount of each unit of a bimolecular rate coefficient [m3 per molecule]."""


def rate_unit(unit: str, order: int) -> tuple[str, float]:
    """Give the unit of a rate coefficient of any order, and what a coefficient in SI is to be divided by.

    Parameters
    ----------
    unit
        Unit of a bimolecular rate coefficient.
    order
        Molecules on the side that reacts, 1 or more.

    Returns
    -------
    tuple
        Name of the unit, and its size in (m3 per molecule)^(order-1) s-1.
    """
    concentration, size = concentration_unit(unit, 1 - order)
    return (f"{concentration} s-1" if concentration else "s-1"), size


def concentration_unit(unit: str, change: int) -> tuple[str, float]:
    """Give the unit of a concentration to a power, as a rate unit names it.

    Parameters
    ----------
    unit
        Unit of a bimolecular rate coefficient.
    change
        The power: products less reactants for an equilibrium constant.

    Returns
    -------
    tuple
        Name of the unit (empty for power 0), and its size in (molecules per m3)^change.
    """
    if change == 0:
        return "", 1.0
    volume, amount = unit.split()[:2]
    letters, power = (volume[:-1], 3) if volume.endswith("3") else (volume, 1)
    amount = amount.removesuffix("-1")
    size = (1.0 / _VOLUMES[unit]) ** change
    if change < 0:
        name = f"{letters}{_power(-change * power)} {amount}{_power(change)}"
    else:
        name = f"{amount}{_power(change)} {letters}{_power(-change * power)}"
    return name, size


def _power(exponent: int) -> str:
    return "" if exponent == 1 else str(exponent)
