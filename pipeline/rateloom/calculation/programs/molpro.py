"""Molpro: the lines that carry results."""

from typing import Any

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation.names import usual_basis, usual_method
from rateloom.calculation.programs.program import GHZ_PER_CM, NUMBER, Program, last_group, last_table, number
from rateloom.calculation.programs.search import pattern
from rateloom.calculation.record import Level

ENERGY = r" +(?:total )?[Ee](?:nergy|NERGY):? +"


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read the functional and the basis set."""
    functional = last_group(r"^ Density functional group (\w[\w-]*)=", text)
    method = functional if kind == "DFT" else "HF" if kind == "SCF" else kind
    basis = last_group(r"(?i)^ *SETTING BASIS +=? +(\S+)", text)
    basis = basis or last_group(r"(?i)^ *basis *= *\{?([\w*+()-]+)", text)
    basis = basis or last_group(r"(?i)Library entry [A-Z]+ +S (\S+)", text)
    return Level(usual_method(method), usual_basis(basis))


def gradient(text: str) -> FloatArray | None:
    """Read the last gradient."""
    rows = r"GRADIENT FOR STATE .*\n\s*\n Atom .*\n\s*\n((?: +\d+(?: +-?\d+\.\d+){3} *\n)+)"
    return last_table(rows, text, slice(1, 4))


def rotational_constants(text: str) -> FloatArray | None:
    """Read the last constants, printed in GHz."""
    line = last_group(r"^ Rotational constants: (.*) GHz", text)
    return np.array([number(word) / GHZ_PER_CM for word in pattern(NUMBER).findall(line)]) if line else None


MOLPRO = Program(
    name="Molpro",
    reader="rateloom.calculation.repairs.molpro:RepairedMolpro",
    phrases=("PROGRAM SYSTEM MOLPRO", "1PROGRAM * ", " PROGRAM * ALASKA", " PROGRAM * SEWARD", " PROGRAM * RHF-SCF"),
    version=r"^\s*Version (\d+\.\d+) linked",
    begins=r"PROGRAM SYSTEM MOLPRO",
    ends=r"^ (?:Molpro calculation terminated|Variable memory released)"
    # A log file without heading ends with the summary of its last step.
    r"|^ DISK USED .*\n(?: +[SG][FA] USED .*\n)* \*{50,}\s*\Z",
    fails=r"^ (?:\?|ERROR EXIT|GLOBAL ERROR)",
    level=level,
    energies=(
        ("SCF", r"^ !(?:RHF|UHF) STATE +\d+\.\d+" + ENERGY + NUMBER),
        ("DFT", r"^ !(?:RKS|UKS) STATE +\d+\.\d+" + ENERGY + NUMBER),
        ("MP2", r"^ !?(?:RHF-R?)?MP2(?: STATE +\d+\.\d+)?" + ENERGY + NUMBER),
        ("MP2-F12", r"^ !?(?:RHF-R?)?MP2-F12(?:/\S+)?" + ENERGY + NUMBER),
        ("CCSD", r"^ !?(?:RHF-)?[RU]?CCSD" + ENERGY + NUMBER),
        ("CCSD(T)", r"^ !?(?:RHF-)?[RU]?CCSD\(T\)" + ENERGY + NUMBER),
        ("CCSD-F12", r"^ !?(?:RHF-)?[RU]?CCSD-F12[ab]?" + ENERGY + NUMBER),
        ("CCSD(T)-F12", r"^ !?(?:RHF-)?[RU]?CCSD\(T\)-F12[ab]?" + ENERGY + NUMBER),
        ("QCISD(T)", r"^ !?(?:RHF-)?[RU]?QCISD\(T\)" + ENERGY + NUMBER),
        ("CASSCF", r"^ !MCSCF STATE +1\.\d+" + ENERGY + NUMBER),
        ("MRCI", r"^ !MRCI STATE +1\.\d+" + ENERGY + NUMBER),
    ),
    converged=r"END OF GEOMETRY OPTIMIZATION",
    not_converged=r"No convergence in max\. number of iterations|Optimization did not converge",
    gradient=gradient,
    rotational_constants=rotational_constants,
)
