"""NWChem: several tasks a file; the lines that carry results."""

import re
from typing import Any

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.calculation.names import usual_basis, usual_method
from rateloom.calculation.programs.program import NUMBER, Program, last_group, last_table, number
from rateloom.calculation.programs.search import matches, pattern
from rateloom.calculation.record import Level

COMPONENTS = {
    "Hartree-Fock (Exact) Exchange": "HF",
    "Slater Exchange Functional": "Slater",
    "Becke 1988 Exchange Functional": "B88",
    "Lee-Yang-Parr Correlation Functional": "LYP",
    "VWN V Correlation Functional": "VWN5",
    "VWN I RPA Correlation Functional": "VWN1RPA",
    "Perdew 1986 Correlation Functional": "P86",
    "Perdew 1991 LDA Correlation Functional": "PW91LDA",
    "PerdewBurkeErnzerhof Exchange Functional": "PBEx",
    "PBE Correlation Functional": "PBEc",
    "Perdew 1981 Correlation Functional": "P81",
}
"""Names printed in ``XC Information``, shortened."""
MIXTURES = {
    "B88 0.5 HF 0.5 LYP 1": "BHandHLYP",
    "B88 1 LYP 1": "BLYP",
    "B88 0.72 HF 0.2 LYP 0.81 Slater 0.8 VWN1RPA 0.19": "B3LYP",
    "HF 1": "HF",
}
"""Components with their shares, sorted, to the name of the functional."""
FAMILY_WORDS = re.compile(r"\s+(?:Method XC (?:Potential|Functional)|Potential|Functional|Method)\s*$")


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read functional or method and basis from the last task before the energy."""
    if kind == "DFT":
        method, dispersion = functional(text)
    else:
        method, dispersion = ("HF" if kind == "SCF" else kind), ""
    return Level(usual_method(method), basis(text), solvent(text), dispersion)


def functional(text: str) -> tuple[str, str]:
    """Name the functional in the last ``XC Information`` and its dispersion correction."""
    start = text.rfind("XC Information")
    if start < 0:
        return "", ""
    lines = text[start:].split("\n")[2:]
    shares: dict[str, float] = {}
    for line in lines:
        if not line.strip():
            break
        name, _, share = line.strip().rpartition(" ")
        if pattern(r"^\s*\d*\.\d+\s*$").match(share):
            shares[name.strip()] = number(share)
        else:
            # A functional with a name of its own is printed in one line, its parts below it.
            shares = {line.strip(): 1.0}
            break
    block = text[start : start + 4000]
    dispersion = last_group(r"(DFT-D3-BJ|DFT-D3BJ|DFT-D3|DFT-D2|DFT-D4|XDM)", block).replace("DFT-", "")
    for name in shares:
        if FAMILY_WORDS.search(name) and shares[name] == 1.0:
            first = FAMILY_WORDS.sub("", name)
            if len(first.split()) == 1 and first not in ("Slater",):
                return first, dispersion
    mixture = " ".join(f"{COMPONENTS.get(name, name)} {share:g}" for name, share in sorted(short(shares).items()))
    return MIXTURES.get(mixture, mixture), dispersion


def short(shares: dict[str, float]) -> dict[str, float]:
    """Shorten the names of components."""
    return {COMPONENTS.get(name, name): share for name, share in shares.items()}


def basis(text: str) -> str:
    """Read the names in the last summary of the basis set, one where all elements share it."""
    names: list[str] = []
    for match in matches(r'^ Summary of "ao basis" -> .*\n.*\n.*\n.*\n((?:.*\S.*\n)+)', text):
        names = [word[1] for line in match.group(1).splitlines() if len(word := line.split()) > 1]
    return "+".join(dict.fromkeys(usual_basis(name) for name in names))


def multiplicity(text: str) -> int | None:
    """Read the last multiplicity, or the numbers of electrons in the place of it."""
    last = None
    word = r"^ *Spin multiplicity *: *(\d+)"
    electrons = r"^ *alpha electrons *= *(\d+)\n *beta  ?electrons *= *(\d+)"
    for match in matches(rf"{word}|{electrons}|^ *open shells *= *(\d+)", text):
        direct, alpha, beta, shells = match.groups()
        last = int(direct) if direct else int(shells) + 1 if shells else int(alpha) - int(beta) + 1
    return last


def solvent(text: str) -> str:
    """Read the solvent of a continuum model."""
    if "COSMO solvation results" not in text and "solvation energy" not in text:
        return ""
    return last_group(r"^\s*solvent\s*(?:name long|:)\s*:?\s*(\S+)", text) or "COSMO"


def gradient(text: str) -> FloatArray | None:
    """Read the last gradient."""
    rows = r"ENERGY GRADIENTS *\n(?:.*\n){3}((?: +\d+ +\S+(?: +-?\d+\.\d+){6} *\n)+)"
    return last_table(rows, text, slice(5, 8))


def rotational_constants(text: str) -> FloatArray | None:
    """Read the last constants; an overflown one (an axis without inertia) is left out."""
    start = text.rfind(" Rotational Constants\n")
    if start < 0:
        return None
    found = pattern(r"^ [ABC]=\s*" + NUMBER + r"\s+cm-1").findall(text[start : start + 400])
    return np.array([number(word) for word in found])


def hessian(text: str) -> FloatArray | None:
    """Read the lower triangle of the last mass-weighted Hessian (with translations and rotations)."""
    start = text.rfind("MASS-WEIGHTED NUCLEAR HESSIAN")
    if start < 0:
        return None
    rows: dict[int, list[float]] = {}
    for line in text[start : text.find("NORMAL MODE EIGENVECTORS", start)].split("\n")[2:]:
        words = line[:5].split()
        if len(words) == 1 and words[0].isdigit() and "D" in line:
            values = pattern(r"-?\d\.\d+D[-+]\d+").findall(line)
            rows.setdefault(int(words[0]), []).extend(number(value) for value in values)
    size = len(rows)
    if not size or any(len(rows.get(row, ())) != row for row in range(1, size + 1)):
        return None
    lower = np.array([rows[row] + [0.0] * (size - row) for row in range(1, size + 1)])
    return lower + np.tril(lower, -1).T


NWCHEM = Program(
    name="NWChem",
    reader="rateloom.calculation.repairs.nwchem:RepairedNWChem",
    phrases=("Northwest Computational Chemistry Package",),
    version=r"Northwest Computational Chemistry Package \(NWChem\) (\S+)",
    begins=r"^ +NWChem Input Module\s*$",
    ends=r"^ Total times  cpu:",
    fails=r"^ *For more information see the NWChem manual|There is an error in the input file"
    r"|Received an Error in Communication",
    level=level,
    idle_rows=(r" *(?:MO Center=|overlap|alpha|beta) ",),
    energies=(
        ("SCF", r"^ +Total SCF energy\s*=\s*" + NUMBER),
        ("DFT", r"^ +Total DFT energy\s*=\s*" + NUMBER),
        ("MP2", r"^ +Total MP2 energy\s+" + NUMBER),
        ("MP2", r"MBPT\(2\) total energy / hartree\s*=\s*" + NUMBER),
        ("MP3", r"MBPT\(3\) total energy / hartree\s*=\s*" + NUMBER),
        ("MP4", r"MBPT\(4\) total energy / hartree\s*=\s*" + NUMBER),
        ("CCSD", r"^ CCSD total energy / hartree\s*=\s*" + NUMBER),
        ("CCSD", r"Total CCSD energy:\s*" + NUMBER),
        ("CCSD", r"total CCSD energy\s*:?\s*" + NUMBER),
        ("CCSD(T)", r"CCSD\(T\) total energy / hartree\s*=\s*" + NUMBER),
        ("CCSD(T)", r"Total CCSD\(T\) energy:\s*" + NUMBER),
        ("QCISD", r"QCISD total energy / hartree\s*=\s*" + NUMBER),
        ("QCISD(T)", r"QCISD\(T\) total energy / hartree\s*=\s*" + NUMBER),
    ),
    converged=r"^ +Optimization converged\s*$",
    not_converged=r"^ +Failed to converge in maximum number of steps",
    geometry_follows=True,
    spin_squared=r"<S2>\s*=\s*" + NUMBER,
    multiplicity=multiplicity,
    gradient=gradient,
    rotational_constants=rotational_constants,
    hessian=hessian,
    hessian_is_mass_weighted=True,
    no_geometry_advice="A restart that computes frequencies alone prints none: repeat the `geometry` block in its "
    "input, or compute geometry and frequencies in one run, so that both stand in the same file.",
)
