"""Gaussian 98 to 16: several jobs a file (``Opt Freq``, ``--Link1--``); the lines that carry results."""

import re
from typing import Any

from rateloom.arrays import FloatArray
from rateloom.calculation.names import usual_basis, usual_dispersion, usual_method
from rateloom.calculation.programs.program import (
    NUMBER,
    PrintedEnergy,
    Program,
    last_group,
    last_table,
    number,
)
from rateloom.calculation.programs.search import matches
from rateloom.calculation.record import Level
from rateloom.remarks import Remark

STEPS_OF_FREQUENCIES = 2
SEMIEMPIRICAL = ("AM1", "PM3", "PM6", "PM7", "MNDO", "INDO", "CNDO", "ZINDO", "PM3MM", "PDDG", "PM7MOPAC")
ROUTE = r"^ -{5,}\n((?: #.*\n)(?: .*\n)*?) -{5,}$"
OLD_NAMES = {"B+HF-LYP": "B3LYP", "B-LYP": "BLYP", "B-P86": "BP86", "B+HF-P86": "B3P86", "B+HF-PW91": "B3PW91"}
AMPLITUDES = (("QCISD", "QCISD"), ("CCSD", "CCSD"), ("CCD", "CCD"), ("BD", "BCCD"))
FORTRAN = r"(-?\d\.\d+D[-+]\d+)"
"""The archive at the end repeats some energies in this place with fewer digits and no exponent."""
LINES = (
    ("ONIOM", r"^ ONIOM: extrapolated energy\s*=\s*" + NUMBER),
    ("MP2", r"EUMP2\s*=\s*" + NUMBER),
    ("MP3", r"EUMP3=\s*" + NUMBER),
    ("MP4(SDQ)", r"UMP4\(SDQ\)=\s*" + NUMBER),
    ("MP4", r"UMP4\(SDTQ\)=\s*" + NUMBER),
    ("CCSD(T)", r"^ CCSD\(T\)=\s*" + FORTRAN),
    ("QCISD(T)", r"^ QCISD\(T\)=\s*" + FORTRAN),
    ("BCCD(T)", r"^ BD\(T\)=\s*" + FORTRAN),
    ("double-hybrid DFT", r"^ *E2\([^)]*\)\s*=\s*\S+\s+E\([^)]*\)\s*=\s*" + NUMBER),
)


def energies(text: str) -> list[PrintedEnergy]:
    """Read all energies; what an amplitude equation solves is told by the route of its job."""
    found = [
        PrintedEnergy(kind, match.start(1), number(match.group(1)))
        for kind, expression in LINES
        for match in matches(expression, text)
    ]
    for match in matches(r"^ SCF Done:\s+E\(([^)]*)\)\s*=\s*" + NUMBER, text):
        name = reference(match.group(1))
        kind = "semiempirical" if name.upper() in SEMIEMPIRICAL else "SCF" if name == "HF" else "DFT"
        found.append(PrintedEnergy(kind, match.start(2), number(match.group(2))))
    routes = [(match.end(), match.group(1)) for match in matches(ROUTE, text)]
    for match in matches(r"E\((?:CORR|Corr)\)=\s*" + NUMBER, text):
        route = next((words for end, words in reversed(routes) if end < match.start()), "").upper()
        kind = next((kind for word, kind in AMPLITUDES if word in route), "CCSD")
        found.append(PrintedEnergy(kind, match.start(1), number(match.group(1))))
    return found


def reference(name: str) -> str:
    """Take R, U or RO off the name in ``SCF Done``."""
    bare = re.sub(r"^(?:RO|R|U)(?=[A-Za-z])", "", name)
    return OLD_NAMES.get(bare.upper(), bare)


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read functional, basis, solvent and dispersion of the job that the energy belongs to."""
    route = " ".join(line.strip() for line in last_group(ROUTE, text).splitlines())
    scf = reference(last_group(r"^ SCF Done:\s+E\(([^)]*)\)", text))
    method = {"SCF": "HF", "DFT": scf, "semiempirical": scf}.get(kind, kind)
    if kind == "double-hybrid DFT":
        method = last_group(r"^ *E2\([^)]*\)\s*=\s*\S+\s+E\(([^)]*)\)", text)
    if kind == "ONIOM":
        return Level(method=last_group(r"(ONIOM\([^)]*(?:\([^)]*\)[^)]*)*\))", route.upper()) or "ONIOM")
    basis = last_group(r"^ Standard basis: (\S+)", text) or last_group(r"^ (General basis) read from cards", text)
    solvent = last_group(r"^ Solvent\s*:\s*([^,\n]+),", text)
    dispersion = last_group(r"EMPIRICALDISPERSION=\(?(\w+)", route.upper())
    if not dispersion:
        dispersion = last_group(r"Grimme-(D\w+(?:\(BJ\))?) Dispersion energy", text)
    return Level(usual_method(method), usual_basis(basis), solvent.strip(), usual_dispersion(dispersion))


def gradient(text: str) -> FloatArray | None:
    """Read the last forces."""
    rows = r"Forces \(Hartrees/Bohr\)\s*\n.*\n -+\n((?: +\d+ +\d+(?: +-?\d*\.\d+){3} *\n)+)"
    return last_table(rows, text, slice(2, 5))


def ends_of_search(text: str) -> list[tuple[int, bool]]:
    """Find the ends of optimisations; a frequency job, of two steps at most, finds its point stationary too."""
    found: list[tuple[int, bool]] = []
    steps = list(matches(r"maximum allowed number of steps= *(\d+)\.", text))
    for match in matches(r"^ +-- (Stationary point found|Number of steps exceeded)", text):
        allowed = next((int(step.group(1)) for step in reversed(steps) if step.start() < match.start()), 0)
        if allowed > STEPS_OF_FREQUENCIES:
            found.append((match.start(), match.group(1).startswith("Stationary")))
    return found


def caution(text: str) -> tuple[Remark, ...]:
    """Say that a composite energy is not taken: it is printed with its zero-point energy alone."""
    name = last_group(r"^ (G[1-4](?:MP2|B3)?|CBS-\w+|W1\w+) ?\(0 K\)=", text)
    if not name:
        return ()
    message = (
        f"The output gives a {name} energy, printed with its zero-point energy alone; the highest single energy is "
        "taken instead. Give the electronic energy with `given` in the job file if the composite one is meant."
    )
    return (Remark("composite-energy-not-taken", message, name),)


GAUSSIAN = Program(
    name="Gaussian",
    reader="cclib.parser.gaussianparser:Gaussian",
    phrases=("Entering Gaussian System", "Gaussian, Inc."),
    version=r"^ Gaussian \d+: .*?(G\d+Rev[\w.+]+)",
    begins=r"^ Entering Link 1 =|^ Link1:  Proceeding to internal job step|^ Initial command:",
    ends=r"^ Normal termination of Gaussian",
    fails=r"^ Error termination",
    level=level,
    special_energies=energies,
    idle_rows=(r"\s*\d+\s+(?:\d+\s+[A-Z][a-z]?\s+)?\d+[A-Z]{1,4}\s",),
    masses=r"has atomic number +\d+ and mass +" + NUMBER,
    ends_of_search=ends_of_search,
    spin_squared=r"S\*\*2 before annihilation\s+" + NUMBER,
    gradient=gradient,
    caution=caution,
)
