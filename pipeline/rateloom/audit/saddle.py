"""Does the imaginary mode of a saddle belong to its reaction?

The bonds that change come from the geometries of reactants, saddle and products alone (`read_saddle`); only then is
the mode asked whether it breaks the ones while it forms the others, and what the molecule looks like on either side
of it. Neither the sign of the mode nor the direction of the reaction nor the order of the atoms has a say.
"""

from collections.abc import Sequence
from dataclasses import dataclass, replace

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.audit.limits import Limits
from rateloom.audit.saddle_evidence import Evidence, bond_evidence, shape_evidence, unread_evidence
from rateloom.audit.saddle_mode import ImaginaryMode, imaginary_mode, lowest_frequency
from rateloom.audit.saddle_remarks import confirmed, inconclusive, mode_not_printed, off_reaction, small, unusual
from rateloom.audit.saddle_words import expected_bonds, expected_kinds, expected_shape
from rateloom.calculation import Calculation
from rateloom.molecule import (
    HYDROGEN,
    Pattern,
    Rearrangement,
    atomic_numbers,
    describe_shape_change,
    pattern,
    read_saddle,
    shape_change,
    side_by_side,
)
from rateloom.remarks import Remark

CHOICES = 40_000  # tried at most for one side, divided by the number of atoms


@dataclass(frozen=True, slots=True, kw_only=True)
class SaddleVerdict:
    """What the audit thinks of one saddle for one reaction."""

    verdict: str
    """``confirmed``, ``inconclusive`` or ``off-reaction``."""
    kind: str
    """Kind of reaction in words; empty where the saddle could not be read."""
    expected: str
    """What the mode has to move."""
    moved: str
    """What it moves."""
    share: float
    """Of the kinetic energy of the mode in the expected motion [1]."""
    imaginary_per_cm: float | None
    """Its frequency, negative; None where there is none."""
    remarks: tuple[Remark, ...]


@dataclass(frozen=True, slots=True)
class _Expected:
    """What the reaction asks of the mode, and what the mode says to it."""

    kind: str
    words: str
    evidence: Evidence


def judge_saddle(
    saddle: Calculation,
    reactants: Sequence[Calculation],
    products: Sequence[Calculation],
    limits: Limits | None = None,
) -> SaddleVerdict:
    """Judge whether the imaginary mode of a saddle leads from the reactants to the products.

    Parameters
    ----------
    saddle
        The frequency calculation of the transition state.
    reactants, products
        One calculation a molecule; a species that takes part twice is given twice.
    limits
        Thresholds of the audit, the defaults where None.

    Returns
    -------
    SaddleVerdict
        With remarks for whatever is not confirmed.
    """
    limits = limits or Limits()
    atoms, geometry = _shape(saddle)
    before, after = [_shape(member) for member in reactants], [_shape(member) for member in products]
    molecules = side_by_side(before), side_by_side(after)
    reading = read_saddle(atoms, geometry, *molecules, CHOICES)
    change, mode = reading.rearrangement, imaginary_mode(saddle)
    if change is None:
        words = expected_kinds(*molecules)
        same = sorted(atomic_numbers(atoms)) == sorted(molecules[0].numbers) == sorted(molecules[1].numbers)
        evidence = _NO_MODE
        if mode is not None:
            evidence = unread_evidence(
                atoms, geometry, mode, same_atoms=same, complete=reading.complete, expected=words
            )
        expected = _Expected("", words, evidence)
    elif change.changed:
        evidence = _NO_MODE if mode is None else bond_evidence(atoms, geometry, mode, change)
        expected = _Expected(change.kind, expected_bonds(atoms, change), evidence)
    else:
        minima = [(molecules[0], before[0][1]), (molecules[1], after[0][1])]
        expected = _change_of_shape(atoms, geometry, mode, change, minima)
    return _verdict(expected, lowest_frequency(saddle), limits, _usual_row(atoms, change, expected.kind))


_NO_MODE = Evidence("inconclusive", 0.0, "", "no imaginary mode with its displacements")


def _change_of_shape(
    atoms: Sequence[str],
    geometry: FloatArray,
    mode: ImaginaryMode | None,
    change: Rearrangement,
    minima: Sequence[tuple[Pattern, FloatArray]],
) -> _Expected:
    saddle = pattern(atomic_numbers(atoms), change.reactant_bonds)
    if mode is None:
        shape = shape_change(saddle, geometry, np.zeros_like(geometry), np.ones(len(atoms)), minima)
        return _Expected(describe_shape_change(shape), expected_shape(atoms, shape.moving), _NO_MODE)
    shape = shape_change(saddle, geometry, mode.displacement, mode.masses, minima)
    evidence = shape_evidence(atoms, geometry, mode, shape)
    return _Expected(describe_shape_change(shape), expected_shape(atoms, shape.moving), evidence)


def _verdict(expected: _Expected, frequency: float | None, limits: Limits, usual_row: str) -> SaddleVerdict:
    """Add the remarks: a mode that is not printed, soft, another motion, open, or of unusual magnitude."""
    evidence = expected.evidence
    remarks: list[Remark] = []
    if frequency is not None and evidence is _NO_MODE:
        remarks.append(mode_not_printed(frequency, expected.words))
    elif frequency is not None:
        soft = -frequency < limits.small_imaginary_per_cm
        if soft and evidence.verdict == "off-reaction":
            evidence = replace(
                evidence, verdict="inconclusive", missing="so soft a mode may be noise or a flat torsion"
            )
        if soft:
            remarks.append(small(frequency, limits.small_imaginary_per_cm, evidence.verdict))
        if evidence.verdict == "off-reaction":
            remarks.append(off_reaction(frequency, evidence.moved, expected.words, evidence.share))
        elif evidence.verdict == "inconclusive":
            missing = evidence.missing
            remarks.append(inconclusive(frequency, evidence.moved, expected.words, missing, evidence.share))
        else:
            remarks.append(confirmed(frequency, expected.kind, expected.words, evidence.moved, evidence.share))
            remarks += [] if soft else unusual(frequency, usual_row)
    return SaddleVerdict(
        verdict=evidence.verdict,
        kind=expected.kind,
        expected=expected.words,
        moved=evidence.moved,
        share=evidence.share,
        imaginary_per_cm=frequency,
        remarks=tuple(remarks),
    )


def _usual_row(atoms: Sequence[str], change: Rearrangement | None, kind: str) -> str:
    """Row of the table of usual magnitudes; the kind of a change of shape is its own row."""
    if change is None or not change.changed:
        return kind
    numbers = atomic_numbers(atoms)
    with_hydrogen = any(numbers[i] == HYDROGEN for bond in change.changed for i in bond)
    return "bonds of hydrogen" if with_hydrogen else "bonds of heavy atoms"


def _shape(calculation: Calculation) -> tuple[tuple[str, ...], FloatArray]:
    """Atoms and geometry; where a file of one atom prints no geometry, it lies at the origin."""
    geometry = calculation.geometry_angstrom
    if geometry.shape != (len(calculation.atoms), 3):
        geometry = np.zeros((len(calculation.atoms), 3))
    return calculation.atoms, geometry
