"""Vibrations of one species: the printed frequencies, or those for other isotopes, sorted into real and imaginary."""

from dataclasses import dataclass

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation.record import Calculation
from rateloom.remarks import Remark
from rateloom.statmech.identity import Framework
from rateloom.statmech.recalculation import PER_CM, ZERO, modes_for_isotopes, recovered_modes


@dataclass(frozen=True, slots=True, kw_only=True)
class Vibrations:
    """Harmonic vibrations, not scaled."""

    real: FloatArray
    """Shape (n_modes,): the reaction coordinate left out, ascending [Hz]"""
    imaginary: float | None
    """Magnitude of the reaction coordinate's frequency [Hz]; None in a minimum."""
    source: str


def vibrations_of(
    calculation: Calculation | None, framework: Framework, *, is_saddle: bool
) -> tuple[Vibrations | None, tuple[Remark, ...]]:
    """Take the vibrations of a species from its calculation.

    Parameters
    ----------
    calculation : Calculation or None
        The calculation with the frequencies [cm-1].
    framework : Framework
        Positions [m] and masses [kg].
    is_saddle : bool
        Whether one imaginary mode is the reaction coordinate.

    Returns
    -------
    Vibrations or None
        Frequencies [Hz]; None where they are missing or their number is wrong.
    tuple of Remark
        What is wrong with them.

    References
    ----------
    .. [1] G. Herzberg, Infrared and Raman Spectra, Van Nostrand, 1945, ch. II, for the number (from memory).
    """
    printed = None if calculation is None else calculation.frequencies_per_cm
    if framework.shape == "atom":
        return _sorted_out(np.zeros(0), "an atom has none", is_saddle=is_saddle)
    if printed is None or calculation is None:
        message = "There are no frequencies: give a file with them under `frequencies`."
        return None, (Remark("no-frequencies", message),)
    source = "as printed"
    remarks: tuple[Remark, ...] = ()
    remark = _count_remark(printed, framework)
    if remark is not None:
        recovered = recovered_modes(calculation, framework, printed)
        if recovered is None:
            return None, (remark,)
        remarks, source = (_recovery_remark(printed, recovered, framework),), "recalculated from the Hessian"
        printed = recovered
    if framework.substituted:
        recalculated, source = modes_for_isotopes(calculation, framework, printed)
        if recalculated is None:
            return None, (*remarks, Remark("isotopes-need-normal-modes", source))
        printed = recalculated
    vibrations, more = _sorted_out(printed, source, is_saddle=is_saddle)
    return vibrations, remarks + more


def _count_remark(printed: FloatArray, framework: Framework) -> Remark | None:
    atoms = len(framework.labels)
    expected, rule = (3 * atoms - 5, "3N-5") if framework.shape == "linear" else (3 * atoms - 6, "3N-6")
    modes = np.abs(printed) > ZERO  # false for what is not a number, too
    if len(printed) == expected and modes.all():
        return None
    message = (
        f"The output has {int(modes.sum())} vibrations; a {framework.shape} molecule of {atoms} atoms has "
        f"{rule} = {expected}: check geometry and frequencies."
    )
    return Remark("wrong-number-of-modes", message, value=str(int(modes.sum())), limit=str(expected))


def _recovery_remark(printed: FloatArray, recovered: FloatArray, framework: Framework) -> Remark:
    lost = recovered
    for frequency in printed[np.abs(printed) > ZERO]:
        lost = np.delete(lost, np.abs(lost - frequency).argmin())
    values = ", ".join(f"{value:.1f}" for value in lost)
    message = (
        f"The output lacks a vibration of this {framework.shape} molecule (a nearly linear one loses a bend when a "
        f"program takes it for bent): all were recalculated from its Hessian, which adds {values} cm-1."
    )
    return Remark("modes-recalculated", message, value=f"{values} cm-1")


def _sorted_out(per_cm: FloatArray, source: str, *, is_saddle: bool) -> tuple[Vibrations | None, tuple[Remark, ...]]:
    """Set the reaction coordinate apart; an imaginary mode beside it counts as real, of the same magnitude.

    Whether such a mode is noise or an error hangs on a threshold, so that the audit remarks on it.
    """
    ascending = np.sort(per_cm)
    if not is_saddle:
        return Vibrations(real=np.sort(np.abs(ascending)) * PER_CM, imaginary=None, source=source), ()
    if not (ascending < 0).any():
        lowest = f"; the lowest mode has {ascending[0]:.1f} cm-1" if len(ascending) else ""
        message = f"There is no imaginary mode, so that this is no saddle and has no reaction coordinate{lowest}."
        return None, (Remark("no-imaginary-mode", message, value="0", limit="1"),)
    rest = np.sort(np.abs(ascending[1:]))
    return Vibrations(real=rest * PER_CM, imaginary=-float(ascending[0]) * PER_CM, source=source), ()
