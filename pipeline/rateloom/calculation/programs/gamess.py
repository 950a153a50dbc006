"""GAMESS (US), PC GAMESS and Firefly: the lines that carry results."""

from typing import Any

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation.names import usual_basis, usual_method
from rateloom.calculation.programs.program import (
    GHZ_PER_CM,
    NUMBER,
    PrintedEnergy,
    Program,
    last_group,
    number,
)
from rateloom.calculation.programs.search import matches, pattern
from rateloom.calculation.record import Level

BASIS_NAMES = {"CCD": "cc-pVDZ", "CCT": "cc-pVTZ", "CCQ": "cc-pVQZ", "CC5": "cc-pV5Z"} | {
    "ACCD": "aug-cc-pVDZ", "ACCT": "aug-cc-pVTZ", "ACCQ": "aug-cc-pVQZ", "ACC5": "aug-cc-pV5Z"
}  # fmt: skip
WAVE_FUNCTIONS = ("RHF", "UHF", "ROHF", "GVB", "MCSCF")
SEMIEMPIRICAL = ("AM1", "PM3", "MNDO", "RM1")
LINES = (
    ("MP2", r"^\s*E\(MP2\)=\s*" + NUMBER),
    ("CCD", r"COUPLED-CLUSTER ENERGY E\( *CCD\) =\s*" + NUMBER),
    ("CCSD", r"COUPLED-CLUSTER ENERGY E\( *CCSD\) =\s*" + NUMBER),
    ("CCSD", r"^\s*CCSD\s+ENERGY:\s*" + NUMBER),
    ("CCSD(T)", r"COUPLED-CLUSTER ENERGY E\( *CCSD\(T\)\) =\s*" + NUMBER),
    ("CCSD(T)", r"^\s*CCSD\(T\)\s+ENERGY:\s*" + NUMBER),
)


def energies(text: str) -> list[PrintedEnergy]:
    """Read all energies; the word before ENERGY IS tells the method."""
    found = [
        PrintedEnergy(kind, match.start(1), number(match.group(1)))
        for kind, expression in LINES
        for match in matches(expression, text)
    ]
    finals = matches(r"^ FINAL (?:(\S+) )?ENERGY IS\s+" + NUMBER, text)
    return found + [PrintedEnergy(kind_of(m.group(1) or "", text), m.start(2), number(m.group(2))) for m in finals]


def kind_of(word: str, text: str) -> str:
    """Tell the kind of a final energy by its word, in PC GAMESS and Firefly by the input."""
    name = word.split("-", 1)[1] if word[:2] in ("R-", "U-") or word[:3] == "RO-" else word
    if name in SEMIEMPIRICAL:
        return "semiempirical"
    if not name:
        return "SCF" if functional(text) == "" else "DFT"
    return {"GVB": "GVB", "MCSCF": "CASSCF"}.get(name, "SCF" if name in WAVE_FUNCTIONS else "DFT")


def functional(text: str) -> str:
    """Name the functional that the program says it uses."""
    name = last_group(r"DFTTYP= *(\w[\w-]*)", text)
    return "" if name in ("", "NONE") else name


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read the functional and the basis set options."""
    word = last_group(r"^ FINAL (?:R-|U-|RO-)?(\S+) ENERGY IS", text)
    method = {"DFT": functional(text) or word, "semiempirical": word, "SCF": "HF"}.get(kind, kind)
    return Level(usual_method(method), "" if kind == "semiempirical" else basis(text))


def basis(text: str) -> str:
    """Name the basis set of the options printed."""
    family, count = last_group(r"^ +GBASIS=(\w+)", text), last_group(r"IGAUSS= +(\d+)", text)
    if family in BASIS_NAMES:
        return BASIS_NAMES[family]
    if family not in ("STO", "N21", "N31", "N311"):
        return family
    if family == "STO":
        return f"STO-{count}G"
    heavy, light = last_group(r"NDFUNC= +(\d+)", text), last_group(r"NPFUNC= +(\d+)", text)
    diffuse = "+" * sum(last_group(rf"{name} *= +(\w)", text) == "T" for name in ("DIFFSP", "DIFFS"))
    stars = "**" if int(light or 0) else "*" if int(heavy or 0) else ""
    if int(heavy or 0) > 1 or int(light or 0) > 1:
        stars = f"({heavy}d,{light}p)" if int(light or 0) else f"({heavy}d)"
    return usual_basis(f"{count}-{family[1:]}{diffuse}G{stars}")


def displaced(text: str) -> list[tuple[int, int]]:
    """Find the displaced geometries of a numerical Hessian."""
    spans: list[tuple[int, int]] = []
    for match in matches(r"^\s*COORD +[1-9]\d* +NUCLEAR COORDINATES", text):
        if not spans or match.start() >= spans[-1][1]:
            end = text.find("NORMAL COORDINATE ANALYSIS", match.start())
            spans.append((match.start(), end if end >= 0 else len(text)))
    return spans


def gradient(text: str) -> FloatArray | None:
    """Read the largest component of the last gradient."""
    word = last_group(r"MAXIMUM GRADIENT =\s*" + NUMBER, text)
    return np.array([number(word)]) if word else None


def rotational_constants(text: str) -> FloatArray | None:
    """Read the last constants, printed in GHz."""
    line = last_group(r"THE ROTATIONAL CONSTANTS ARE \(IN GHZ\)\s*\n(.*)", text)
    return np.array([number(word) / GHZ_PER_CM for word in pattern(NUMBER).findall(line)]) if line else None


GAMESS = Program(
    name="GAMESS",
    reader="rateloom.calculation.repairs.gamess:RepairedGAMESS",
    phrases=("GAMESS VERSION", "Firefly version", "PC GAMESS version"),
    version=r"(?:GAMESS VERSION =|Firefly version|PC GAMESS version) *(\d[^,*\n]*?) *[,*(\n]",
    begins=r"^.*(?:\* +GAMESS VERSION =|\* +Firefly version)",
    ends=r"EXECUTION OF (?:GAMESS|FIREFLY) TERMINATED NORMALLY",
    fails=r"TERMINATED +-?ABNORMALLY",
    level=level,
    idle_rows=(r" *\d+ +[A-Z]{1,2} +\d+ +[A-Z]{1,4} ",),
    idle_headings=(r" *ELECTROSTATIC MOMENTS", r" *OVERLAP MATRIX"),
    special_energies=energies,
    converged=r"\*{3,} +(?:EQUILIBRIUM GEOMETRY|SADDLE POINT) LOCATED",
    not_converged=r"FAILURE TO LOCATE STATIONARY POINT",
    spin_squared=r"S-SQUARED\s*=\s*" + NUMBER,
    displaced=displaced,
    gradient=gradient,
    rotational_constants=rotational_constants,
)
