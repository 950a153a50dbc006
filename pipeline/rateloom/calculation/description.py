"""A record as text for people and as a dictionary for JSON."""

from typing import Any

from rateloom.arrays import FloatArray
from rateloom.calculation.record import Calculation

WIDTH = 22
A_LINE = 6
"""Frequencies in one line."""


def describe(calculation: Calculation) -> str:
    """Write a record as aligned plain text.

    Parameters
    ----------
    calculation : Calculation
        The record.

    Returns
    -------
    str
        Lines without a final line feed; units stand beside the numbers.
    """
    lines = [*summary(calculation), *energies(calculation), *geometry(calculation), *modes(calculation)]
    lines += [f"  {remark.code}: {remark.message}" for remark in calculation.remarks]
    return "\n".join(lines)


def row(label: str, value: object) -> str:
    """Write one label and its value."""
    return f"  {label:<{WIDTH}}{value}"


def summary(calculation: Calculation) -> list[str]:
    """Write what describes the calculation as a whole."""
    lines = [
        row("program", f"{calculation.program} {calculation.program_version}".strip()),
        row("level of theory", calculation.level),
        row("charge, multiplicity", f"{calculation.charge}, {calculation.multiplicity}"),
        row("finished", "yes" if calculation.finished else "NO"),
    ]
    if calculation.converged is not None:
        lines.append(row("optimisation", "converged" if calculation.converged else "NOT converged"))
    if calculation.spin_squared is not None:
        lines.append(row("<S**2>", f"{calculation.spin_squared:.4f}"))
    if calculation.largest_gradient is not None:
        lines.append(row("largest gradient", f"{calculation.largest_gradient:.2e} hartree/bohr"))
    if calculation.rotational_constants_per_cm is not None:
        constants = ", ".join(f"{value:.5f}" for value in calculation.rotational_constants_per_cm)
        lines.append(row("rotational constants", f"{constants} cm-1"))
    return lines


def energies(calculation: Calculation) -> list[str]:
    """Write the energies, the one taken marked."""
    if not calculation.energies_hartree:
        return [row("energy", "none printed")]
    lines = [
        row(f"energy, {kind}", f"{value:.10f} hartree{' (taken)' if kind == calculation.energy_kind else ''}")
        for kind, value in calculation.energies_hartree.items()
    ]
    return [*lines, row("", calculation.energy_reason)]


def geometry(calculation: Calculation) -> list[str]:
    """Write atoms and positions."""
    lines = [f"  {len(calculation.atoms)} atoms [angstrom]"]
    for index, (atom, position) in enumerate(zip(calculation.atoms, calculation.geometry_angstrom, strict=True), 1):
        lines.append(f"  {index:>4}  {atom:<3}" + "".join(f"{value:14.8f}" for value in position))
    return lines


def modes(calculation: Calculation) -> list[str]:
    """Write the frequencies, imaginary ones with an i."""
    values = calculation.frequencies_per_cm
    if values is None:
        return ["  no frequencies"]
    imaginary = int((values < 0).sum())
    lines = [f"  {len(values)} frequencies [cm-1], {imaginary} imaginary"]
    words = [f"{-value:.2f}i" if value < 0 else f"{value:.2f}" for value in values]
    rows = [words[start : start + A_LINE] for start in range(0, len(words), A_LINE)]
    return lines + ["  " + "".join(f"{word:>12}" for word in row) for row in rows]


def as_json_dict(calculation: Calculation) -> dict[str, Any]:
    """Make a dictionary of plain values, ready for JSON.

    Parameters
    ----------
    calculation : Calculation
        The record.

    Returns
    -------
    dict
        The fields of the record by name, arrays as nested lists, what is not printed as None.
    """
    level = calculation.level
    return {
        "program": calculation.program,
        "program_version": calculation.program_version,
        "level": {
            "method": level.method,
            "basis": level.basis,
            "solvent": level.solvent,
            "dispersion": level.dispersion,
        },
        "charge": calculation.charge,
        "multiplicity": calculation.multiplicity,
        "atoms": list(calculation.atoms),
        "geometry_angstrom": listed(calculation.geometry_angstrom),
        "masses_u": listed(calculation.masses_u),
        "energies_hartree": dict(calculation.energies_hartree),
        "energy_kind": calculation.energy_kind,
        "energy_hartree": calculation.energy_hartree,
        "energy_reason": calculation.energy_reason,
        "frequencies_per_cm": listed(calculation.frequencies_per_cm) or [],
        "displacements": listed(calculation.displacements),
        "hessian": listed(calculation.hessian),
        "rotational_constants_per_cm": listed(calculation.rotational_constants_per_cm),
        "spin_squared": calculation.spin_squared,
        "largest_gradient": calculation.largest_gradient,
        "optimised_geometry_angstrom": listed(calculation.optimised_geometry_angstrom),
        "converged": calculation.converged,
        "finished": calculation.finished,
        "remarks": [
            {"code": remark.code, "message": remark.message, "value": remark.value, "limit": remark.limit}
            for remark in calculation.remarks
        ],
    }


def listed(array: FloatArray | None) -> list[Any] | None:
    """Make nested lists of an array."""
    return None if array is None else array.tolist()
