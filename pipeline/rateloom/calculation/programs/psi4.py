"""Psi4: the lines that carry results."""

from typing import Any

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation.names import usual_basis, usual_method
from rateloom.calculation.programs.program import NUMBER, Program, last_group, last_table, number
from rateloom.calculation.programs.search import matches, pattern
from rateloom.calculation.record import Level


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read functional or method, basis and dispersion before the energy."""
    functional = last_group(r"=> Composite Functional: (\S+) <=", text)
    method = functional if kind == "DFT" else "HF" if kind == "SCF" else kind
    base, _, dispersion = method.partition("-D")
    if dispersion and usual_method(method) == method:
        method, dispersion = base, f"D{dispersion}"
    else:
        dispersion = ""
    basis = last_group(r"==> Primary Basis <==\s*\n\s*\n\s*Basis Set: (\S.*)", text)
    solvent = last_group(r"^\s*Solvent name:\s*(\S+)", text)
    return Level(usual_method(method), usual_basis(basis), solvent, dispersion)


def gradient(text: str) -> FloatArray | None:
    """Read the last total gradient."""
    rows = r"-Total [Gg]radient:? *\n *Atom.*\n.*\n((?: +\d+(?: +-?\d+\.\d+){3} *\n)+)"
    return last_table(rows, text, slice(1, 4))


def rotational_constants(text: str) -> FloatArray | None:
    """Read the last constants; an overflown one is left out."""
    line = last_group(r"Rotational constants: (.*)\[cm\^-1\]", text)
    return np.array([number(word) for word in pattern(NUMBER).findall(line)]) if line else None


def displaced(text: str) -> list[tuple[int, int]]:
    """Find the displaced calculations; the reference is the first of them, in versions before 1.1 the last."""
    spans: list[tuple[int, int]] = []
    found = list(matches(r"Loading displacement +(\d+) +of +(\d+)", text))
    for index, match in enumerate(found):
        step, count = int(match.group(1)), int(match.group(2))
        reference = 1 if "Number of geometries (including reference)" in text[: match.start()] else count
        following = found[index + 1].start() if step < count and index + 1 < len(found) else None
        end = following or next_position(text, "passed in", match.end())
        if step != reference:
            spans.append((match.start(), end))
    return spans


def next_position(text: str, phrase: str, start: int) -> int:
    """Find a phrase from a position on, else the end of the text."""
    found = text.find(phrase, start)
    return found if found >= 0 else len(text)


PSI4 = Program(
    name="Psi4",
    reader="rateloom.calculation.repairs.psi4:RepairedPsi4",
    phrases=("Psi4: An Open-Source Ab Initio", "PSI4: An Open-Source Ab Initio"),
    version=r"^\s*(?:Psi4|PSI4) (\S+)(?: release|\s+Driver)?\s*$",
    begins=r"(?:Psi4|PSI4): An Open-Source Ab Initio",
    ends=r"^\*\*\* P(?:si|SI)4 exiting successfully",
    fails=r"^\*\*\* P(?:si|SI)4 encountered an error",
    level=level,
    idle_headings=(r" *(?:Properties will be evaluated at|Multipole Moments:)",),
    energies=(
        ("SCF", r"^\s*@(?:DF-)?(?:R|U|RO|CU)HF Final Energy:\s*" + NUMBER),
        ("DFT", r"^\s*@(?:DF-)?(?:R|U)KS Final Energy:\s*" + NUMBER),
        ("SCF", r"^\s*\* SCF total energy\s*=\s*" + NUMBER),
        ("MP2", r"^\s*\* MP2 total energy\s*=\s*" + NUMBER),
        ("MP2", r"^\s*(?:DF-)?MP2 Total Energy \(a\.u\.\)\s*:\s*" + NUMBER),
        ("MP2", r"=+> (?:DF-)?MP2(?: Energies)? (?:Energies )?<=+\s*\n(?:.*\n)*?\s*Total Energy\s*=\s*" + NUMBER),
        ("MP3", r"^\s*\* MP3 total energy\s*=\s*" + NUMBER),
        ("MP4", r"^\s*\* MP4(?:\(SDTQ\))? total energy\s*=\s*" + NUMBER),
        ("CCSD", r"^\s*\* CCSD total energy\s*=\s*" + NUMBER),
        ("CCSD", r"^\s*(?:DF-)?CCSD Total Energy \(a\.u\.\)\s*:\s*" + NUMBER),
        ("CCSD(T)", r"^\s*\* CCSD\(T\) total energy\s*=\s*" + NUMBER),
        ("CCSD(T)", r"^\s*(?:DF-)?CCSD\(T\) Total Energy \(a\.u\.\)\s*:\s*" + NUMBER),
    ),
    converged=r"^\s*(?:\*{4} Optimization is complete!|Final optimized geometry and variables:"
    r"|Optimizer: Optimization complete!)",
    not_converged=r"^\s*Optimizer: Did not converge!",
    geometry_follows=True,
    spin_squared=r"@S\^2 Observed:\s*" + NUMBER,
    displaced=displaced,
    gradient=gradient,
    rotational_constants=rotational_constants,
)
