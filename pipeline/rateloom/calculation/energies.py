"""Energies printed in an output, and which of them is taken."""

from bisect import bisect_right

from rateloom.calculation.output import Output
from rateloom.calculation.programs.program import PrintedEnergy, Program, number
from rateloom.calculation.programs.search import matches
from rateloom.calculation.track import Track

RANKING = (
    "ONIOM", "CCSD(T)-F12", "CCSD(T)", "QCISD(T)", "BCCD(T)", "CCSD-F12", "CCSD", "QCISD", "BCCD", "CCD", "CC2",
    "MP4", "MP4(SDQ)", "MP3", "MP2-F12", "MP2", "double-hybrid DFT", "CASPT2", "NEVPT2", "MRCI", "CISD", "CASSCF",
    "DFT", "GVB", "SCF", "semiempirical",
)  # fmt: skip
"""Kinds of energy, the one that is taken first."""


def printed_energies(output: Output, program: Program, track: Track) -> list[PrintedEnergy]:
    """Read all energies of an output in the order of the file.

    The lines that a program's table names are read with all their digits. For a program without such a table cclib
    gives the numbers (in hartree before it converts them, thus as printed).
    """
    if program.special_energies:
        found = program.special_energies(output.text)
    elif program.energies:
        found = [
            PrintedEnergy(kind, match.start(1), number(match.group(1)))
            for kind, expression in program.energies
            for match in matches(expression, output.text)
        ]
    else:
        found = cclib_energies(output, track)
    spans = program.displaced(output.text) if program.displaced else []
    found = [energy for energy in found if not inside(spans, energy.position)]
    return sorted(found, key=lambda energy: energy.position)


def inside(spans: list[tuple[int, int]], position: int) -> bool:
    """Tell whether a position lies in one of the spans, which are in ascending order."""
    index = bisect_right(spans, (position, len(spans) and spans[-1][1] + 1)) - 1
    return index >= 0 and spans[index][0] <= position < spans[index][1]


def cclib_energies(output: Output, track: Track) -> list[PrintedEnergy]:
    """Take the energies that cclib found; the methods it noted name them."""
    methods = [str(method) for method in track.metadata.get("methods", ())]
    correlated = [method for method in methods if method.startswith(("CC", "EOM", "BCCD", "QCI"))]
    coupled = correlated[-1] if correlated else "CCSD"
    scf = "DFT" if "DFT" in methods else "SCF"
    found: list[PrintedEnergy] = []
    for name, kinds in (("scfenergies", (scf,)), ("mpenergies", ("MP2", "MP3", "MP4")), ("ccenergies", (coupled,))):
        for entry in track.entries[name]:
            values = entry.value if isinstance(entry.value, (list, tuple)) else [entry.value]
            place = output.position(entry.end)
            found.extend(PrintedEnergy(kind, place, float(value)) for kind, value in zip(kinds, values, strict=False))
    return found


def within(energies: list[PrintedEnergy], begin: int, end: int) -> dict[str, PrintedEnergy]:
    """Give the last energy of each kind between two positions."""
    return {energy.kind: energy for energy in energies if begin <= energy.position < end}


def choose(kinds: list[str]) -> tuple[str, str]:
    """Choose the kind of energy to take, and say why; kinds in the order of the file."""
    if not kinds:
        return "", "the output prints no energy at this geometry"
    if len(kinds) == 1:
        return kinds[0], f"{kinds[0]}: the only energy printed at this geometry"
    known = [kind for kind in RANKING if kind in kinds]
    kind = known[0] if known else kinds[-1]
    others = ", ".join(sorted(other for other in kinds if other != kind))
    return kind, f"{kind}: the highest level printed at this geometry (also there: {others})"
