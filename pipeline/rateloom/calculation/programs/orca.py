"""ORCA 2 to 6: the lines that carry results."""

import re
from typing import Any

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation.names import FUNCTIONALS, bare, known_method, usual_basis, usual_dispersion, usual_method
from rateloom.calculation.programs.program import (
    NUMBER,
    PrintedEnergy,
    Program,
    last_group,
    last_table,
    number,
    positions,
)
from rateloom.calculation.programs.search import matches, pattern
from rateloom.calculation.record import Level

LINES = (
    ("MP2", r"^\s*(?:RI-|DLPNO-)?MP2 TOTAL ENERGY\s*:\s*" + NUMBER),
    ("MP2", r"^\s*Total MP2 energy\s*[.:]+\s*" + NUMBER),
    ("CCSD", r"^\s*E\(TOT\)\s*\.\.\.\s*" + NUMBER),
    ("CCSD", r"^\s*E\(CCSD\)\s*\.\.\.\s*" + NUMBER),
    ("CCSD(T)", r"^\s*E\(CCSD\(T\)\)\s*\.\.\.\s*" + NUMBER),
    ("CASSCF", r"^Final CASSCF energy\s*:\s*" + NUMBER),
)
CONTRIBUTIONS = ("CCSD(T)", "CCSD", "CASSCF", "MP2", "DFT", "SCF")
"""What an energy called final holds, the highest first."""
EXCITED = r"^ *CIS/TD-DFT TOTAL ENERGY|^ *(?:[RU]HF )?(?:ST)?EOM-[A-Z-]+ (?:CALCULATION|RESULTS)|^ *ROCIS-EXCITATION"


def energies(text: str) -> list[PrintedEnergy]:
    """Read all energies; the one called final is that of the highest method run since the last of them.

    The final energy holds dispersion and other corrections that the single contributions do not. After a calculation
    of excited states it is that of the state of interest and left out.
    """
    scf = "DFT" if runs_functional(text) else "SCF"
    found = [
        PrintedEnergy(kind, match.start(1), number(match.group(1)))
        for kind, expression in (*LINES, (scf, r"^Total Energy\s*:\s*" + NUMBER + " Eh"))
        for match in matches(expression, text)
    ]
    start = 0
    finals = []
    excited = positions(EXCITED, text)
    for match in matches(r"^FINAL SINGLE POINT ENERGY(?: \([^)]*\))?\s+" + NUMBER, text):
        parts = {energy.kind for energy in found if start <= energy.position < match.start()}
        kind = next((name for name in CONTRIBUTIONS if name in parts), scf)
        if kind == "MP2" and scf == "DFT":
            kind = "double-hybrid DFT"
        if not any(start <= place < match.start() for place in excited):
            finals.append(PrintedEnergy(kind, match.start(1), number(match.group(1))))
        start = match.end()
    if scf == "DFT":
        # The second-order part of a double hybrid alone is no MP2 energy.
        found = [energy for energy in found if energy.kind != "MP2"]
    return [*found, *finals]


def input_words(text: str) -> list[str]:
    """Give the words of the simple input lines."""
    return [word for match in matches(r"^\|\s*\d+> *!(.*)$", text) for word in match.group(1).split()]


def runs_functional(text: str) -> bool:
    """Tell whether the self-consistent energy is that of a functional, also where little is printed."""
    if positions(r"^ ?Density Functional +Method +\.+ DFT|^ *Exchange Functional ", text):
        return True
    return any(usual_method(word) in FUNCTIONALS and usual_method(word) != "HF" for word in input_words(text))


def level(text: str, kind: str, metadata: dict[str, Any]) -> Level:
    """Read the words of the simple input line, and what the program says of the basis set."""
    words = input_words(text)
    named = [name for word in words if (name := known_method(word))]
    if kind in ("DFT", "double-hybrid DFT"):
        method = next((name for name in named if name != "HF"), str(metadata.get("functional", "")))
    else:
        method = "HF" if kind == "SCF" else next((name for name in named if bare(name).endswith(bare(kind))), kind)
    basis = last_group(r"^Your calculation utilizes the basis: (\S+)", text)
    basis = basis or next(
        (word for word in words if re.match(r"(?i)(?:def|ma-def|cc-|aug-|6-3|3-21|sto-)", word)), ""
    )
    solvent = last_group(r'(?i)(?:CPCM|SMD|C-PCM|ALPB|COSMO)\((["\w ,-]+)\)', " ".join(words))
    solvent = solvent or last_group(r'(?i)^\|\s*\d+>\s*(?:smd)?solvent\s+"?([\w-]+)', text)
    if not solvent and "CPCM SOLVATION MODEL" in text:
        solvent = "CPCM"
    dispersion = next((word for word in words if re.fullmatch(r"(?i)D[234](?:BJ|ZERO|TZ)?", word)), "")
    return Level(method, usual_basis(basis), solvent.strip('"'), usual_dispersion(dispersion))


def gradient(text: str) -> FloatArray | None:
    """Read the last Cartesian gradient."""
    rows = r"^CARTESIAN GRADIENT.*\n-+\n\s*\n((?: *\d+ +\S+ +:(?: +-?\d+\.\d+){3} *\n)+)"
    return last_table(rows, text, slice(3, 6))


def rotational_constants(text: str) -> FloatArray | None:
    """Read the last constants."""
    line = last_group(r"^Rotational constants in cm-1: (.*)", text)
    return np.array([number(word) for word in pattern(NUMBER).findall(line)]) if line else None


def multiplicity(text: str) -> int | None:
    """Read the multiplicity, in short printing that of the input."""
    word = last_group(r"^ Multiplicity +Mult +\.+ +(\d+)", text)
    word = word or last_group(r"^\|\s*\d+>\s*\*\s*[a-zA-Z]+\s+-?\d+\s+(\d+)", text)
    return int(word) if word else None


ORCA = Program(
    name="ORCA",
    reader="cclib.parser.orcaparser:ORCA",
    phrases=("* O   R   C   A *",),
    version=r"^\s*Program Version (\S+)",
    begins=r"^\s*Program Version \d",
    ends=r"^\s*\*+ORCA TERMINATED NORMALLY\*+",
    fails=r"ORCA finished by error termination|ABORTING THE RUN|aborting the run",
    level=level,
    idle_rows=(r" *\d+ *[A-Z][a-z]? +\d+[spdfgh]\S* ",),
    idle_headings=(r" *MOLECULAR ORBITALS *(?:\(|$)", r" *OVERLAP MATRIX *$", r" *ORBITAL ENERGIES *$"),
    special_energies=energies,
    converged=r"THE OPTIMIZATION HAS CONVERGED",
    not_converged=r"The optimization did not converge but reached the maximum",
    spin_squared=r"^Expectation value of <S\*\*2>\s*:\s*" + NUMBER,
    multiplicity=multiplicity,
    no_geometry_advice="Its short printing leaves the geometry out: compute without MiniPrint.",
    gradient=gradient,
    rotational_constants=rotational_constants,
)
