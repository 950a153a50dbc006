"""Q-Chem: several jobs a file; the lines that carry results."""

from bisect import bisect_right
from typing import Any

from rateloom.calculation.names import usual_basis, usual_dispersion, usual_method
from rateloom.calculation.programs.program import NUMBER, PrintedEnergy, Program, number
from rateloom.calculation.programs.search import matches, pattern
from rateloom.calculation.record import Level

WAVE_FUNCTIONS = ("HF", "MP2", "RIMP2", "MP3", "MP4", "CCD", "CCSD", "CCSD(T)", "QCISD", "QCISD(T)", "CIS", "ADC(2)")
REM_LENGTH = 5000
"""Characters in which a block of settings ends."""
BEGINS = r"^\s*Welcome to Q-Chem"
ORIENTATION = r"^\s*Standard Nuclear Orientation \("
LINES = (
    ("MP2", r"^\s*(?:RI-?)?MP2 +(?:total )?energy\s*=\s*" + NUMBER),
    ("MP2", r"^\s*RI-MP2 TOTAL ENERGY\s*=\s*" + NUMBER),
    ("MP2", r"^\s*RIMP2\s+total energy\s*=\s*" + NUMBER),
    ("CCD", r"^\s*CCD total energy\s*=\s*" + NUMBER),
    ("CCSD", r"^\s*CCSD total energy\s*=\s*" + NUMBER),
    ("CCSD(T)", r"^\s*CCSD\(T\) total energy\s*=\s*" + NUMBER),
    ("QCISD", r"^\s*QCISD total energy\s*=\s*" + NUMBER),
    ("QCISD(T)", r"^\s*QCISD\(T\) total energy\s*=\s*" + NUMBER),
)


def settings(text: str) -> dict[str, str]:
    """Read the last ``$rem`` block of a text, words in lower case."""
    start = max(text.rfind("$rem"), text.rfind("$REM"))
    end = min(place for place in (*(text.find(word, start) for word in ("$end", "$END")), len(text)) if place >= 0)
    block = text[start:end] if start >= 0 else ""
    pairs = [line.split("!")[0].replace("=", " ").split() for line in block.lower().splitlines()[1:]]
    return {pair[0]: pair[1] for pair in pairs if len(pair) > 1}


def method_of(given: dict[str, str]) -> str:
    """Name the method or functional of a job."""
    name = given.get("method") or given.get("correlation") or given.get("exchange", "")
    if name in ("", "none"):
        name = given.get("exchange", "")
    return name.removeprefix("eom-")


def energies(text: str) -> list[PrintedEnergy]:
    """Read all energies; whether a self-consistent one is of a functional is told by the input of its job."""
    found = [
        PrintedEnergy(kind, match.start(1), number(match.group(1)))
        for kind, expression in LINES
        for match in matches(expression, text)
    ]
    inputs = [match.start() for match in matches(r"^ *\$(?:rem|REM)", text)]
    waves = [is_wave_function(settings(text[start : start + REM_LENGTH])) for start in inputs]
    for match in matches(r"^ *Total energy in the final basis set *= *" + NUMBER, text):
        wave = waves[before - 1] if (before := bisect_right(inputs, match.start())) else True
        found.append(PrintedEnergy("SCF" if wave else "DFT", match.start(1), number(match.group(1))))
    return found


def is_wave_function(given: dict[str, str]) -> bool:
    """Tell whether the self-consistent energy of a job is that of Hartree-Fock theory."""
    name = given.get("method") or given.get("exchange", "")
    return not name or name.upper().removeprefix("EOM-").removeprefix("RO").removeprefix("U") in WAVE_FUNCTIONS


def displaced(text: str) -> list[tuple[int, int]]:
    """Find numerical differentiations: in a frequency job all from the second geometry on."""
    spans: list[tuple[int, int]] = []
    starts = [match.start() for match in matches(BEGINS, text)] or [0]
    orientations = [match.start() for match in matches(ORIENTATION, text)]
    for start, end in zip(starts, [*starts[1:], len(text)], strict=True):
        geometries = [place for place in orientations if start <= place < end]
        if len(geometries) > 1:
            given = settings(text[start : geometries[0]])
            if given.get("jobtype", given.get("job_type", "")).startswith("freq"):
                spans.append((geometries[1], end))
    return spans


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read method and basis of the job that the energy belongs to."""
    given = settings(text)
    method = method_of(given) if kind == "DFT" else "HF" if kind == "SCF" else kind
    solvent = given.get("solvent_method", "")
    return Level(
        usual_method(method),
        usual_basis(given.get("basis", "")),
        "" if solvent in ("none", "false") else solvent.upper(),
        usual_dispersion(given.get("dft_d", "")),
    )


def mend(line: str) -> str:
    """Set apart the words of a setting written without spaces, such as ``gui=2``, on which cclib stops."""
    return pattern(r"^( *[a-zA-Z_]+)=(\S+)").sub(r"\1 = \2", line)


QCHEM = Program(
    name="Q-Chem",
    reader="cclib.parser.qchemparser:QChem",
    phrases=("A Quantum Leap Into The Future Of Chemistry",),
    version=r"^ Q-Chem (\d[\d.]*(?: \(devel\))?)",
    begins=BEGINS,
    ends=r"Thank you very much for using Q-Chem",
    fails=r"^\s*Q-Chem fatal error|Error in Q-Chem run",
    level=level,
    idle_rows=(r" *\d+ +[A-Z][a-z]? (?: *\d+)? *[spdfgh]\S* ",),
    idle_headings=(r" *Cartesian Multipole Moments", r" *Ground-State Mulliken Net Atomic Charges"),
    special_energies=energies,
    converged=r"OPTIMIZATION CONVERGED",
    not_converged=r"MAXIMUM OPTIMIZATION CYCLES REACHED",
    spin_squared=r"<S\^2>\s*=\s*" + NUMBER,
    displaced=displaced,
    mend=mend,
    masses=r"Has Mass +" + NUMBER,
)
