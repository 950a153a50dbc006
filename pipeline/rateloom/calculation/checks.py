"""What is checked of every record, and said of it in remarks."""

from dataclasses import replace

import numpy as np

from rateloom.calculation import elements
from rateloom.calculation.record import Calculation
from rateloom.remarks import Remark

LARGEST_ENERGY = 1e6
"""[hartree]; that of an atom of uranium is 3e4."""
LARGEST_FREQUENCY = 1e5
"""[cm-1]; that of H2 is 4.4e3."""
LARGEST_COORDINATE = 1e4
"""[angstrom]."""
LARGEST_MASS = 1e3
"""[u]."""
LARGEST_GRADIENT = 1e6
"""[hartree/bohr]."""
LARGEST_SPIN = 1e4
LARGEST_CHARGE = 1e3
"""[elementary charges]."""


def check(record: Calculation, *, cut: bool, charge_printed: bool) -> Calculation:
    """Check a record and add what there is to say."""
    record, spin = check_electrons(record) if charge_printed else (record, (no_charge(record),))
    remarks = (*record.remarks, *spin, *unfinished(record, cut), *not_converged(record))
    return replace(record, remarks=remarks)


def absurd(record: Calculation) -> str:
    """Name what no molecule has, empty where there is nothing: a damaged number, not chemistry, is behind it."""
    geometries = [record.geometry_angstrom, record.optimised_geometry_angstrom]
    coordinates = np.concatenate([geometry for geometry in geometries if geometry is not None])
    groups = (
        ("an energy", "hartree", LARGEST_ENERGY, list(record.energies_hartree.values())),
        ("a frequency", "cm-1", LARGEST_FREQUENCY, record.frequencies_per_cm),
        (
            "a coordinate",
            "angstrom",
            LARGEST_COORDINATE,
            coordinates,
        ),
        ("a mass", "u", LARGEST_MASS, record.masses_u),
        ("a second derivative", "hartree/bohr2", np.finfo(float).max, record.hessian),
        ("a gradient", "hartree/bohr", LARGEST_GRADIENT, record.largest_gradient),
        ("a spin expectation value", "(no unit)", LARGEST_SPIN, record.spin_squared),
        ("a charge", "e", LARGEST_CHARGE, record.charge),
    )
    for name, unit, limit, values in groups:
        if values is None:
            continue
        numbers = np.ravel(np.asarray(values, dtype=np.float64))
        # Written so that NaN fails.
        wrong = numbers[~(np.abs(numbers) <= limit)]
        if len(wrong):
            return f"{name} of {wrong[0]:g} {unit}"
    return ""


def no_charge(record: Calculation) -> Remark:
    """Say that charge and multiplicity are assumed."""
    message = (
        f"The output prints no charge: {record.charge} and multiplicity {record.multiplicity} are assumed. "
        "Give `charge` and `multiplicity` in the job file."
    )
    return Remark("charge-not-printed", message)


def check_electrons(record: Calculation) -> tuple[Calculation, tuple[Remark, ...]]:
    """Hold charge and multiplicity against the number of electrons.

    An even number of electrons has an odd multiplicity. cclib reports NWChem's restricted open-shell doublets as
    triplets (and so on: 2 n + 1 for n unpaired electrons in the place of n + 1), which can be put right.
    """
    count = sum(elements.electrons(atom) for atom in record.atoms) - record.charge
    if (count + record.multiplicity) % 2 == 1 and 1 <= record.multiplicity <= count + 1:
        return record, ()
    repaired = (record.multiplicity + 1) // 2
    if record.multiplicity % 2 == 1 and (count + repaired) % 2 == 1:
        message = (
            f"The output was read as multiplicity {record.multiplicity}, which {count} electrons cannot have; "
            f"{repaired} is taken. Give `multiplicity` in the job file if that is wrong."
        )
        remark = Remark("multiplicity-corrected", message, str(record.multiplicity), str(repaired))
        return replace(record, multiplicity=repaired), (remark,)
    message = (
        f"{count} electrons (charge {record.charge}) cannot have multiplicity {record.multiplicity}. "
        "Check charge and multiplicity of the calculation, or give them in the job file."
    )
    return record, (Remark("electron-count-differs", message, str(record.multiplicity), f"{count} electrons"),)


def unfinished(record: Calculation, cut: bool) -> tuple[Remark, ...]:
    """Say that a calculation did not end normally."""
    if record.finished:
        return ()
    how = "ends in the middle of a block" if cut else "does not say that the calculation ended normally"
    message = (
        f"The {record.program} output {how}; what it holds may belong to an earlier step. "
        "Let the calculation finish, or take the whole output."
    )
    return (Remark("unfinished-calculation", message),)


def not_converged(record: Calculation) -> tuple[Remark, ...]:
    """Say that the last optimisation did not converge."""
    if record.converged is not False:
        return ()
    message = "The last geometry optimisation in the output stopped before it converged. Continue it."
    return (Remark("not-converged", message),)
