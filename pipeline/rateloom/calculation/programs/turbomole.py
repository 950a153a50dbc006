"""Turbomole: one program of the suite a file; the lines that carry results."""

from typing import Any

from rateloom.calculation.names import usual_basis, usual_dispersion, usual_method
from rateloom.calculation.programs.program import NUMBER, Program, first_group, last_group
from rateloom.calculation.record import Level

FUNCTIONALS = {
    "b-p": "BP86",
    "b-p86": "BP86",
    "b3-lyp": "B3LYP",
    "b-lyp": "BLYP",
    "bh-lyp": "BHandHLYP",
    "tpssh": "TPSSh",
}


def level(text: str, kind: str, _metadata: dict[str, Any]) -> Level:
    """Read the functional and the basis sets of the elements."""
    word = last_group(r"^\s*(\S+) functional\s*$", text)
    functional = FUNCTIONALS.get(word.lower(), word)
    method = (functional or "HF") if kind == "SCF" else kind
    # The first table is that of the orbitals; auxiliary sets follow.
    rows = first_group(r"type +atoms +prim +cont +basis *\n *-+ *\n((?: +[a-z]+ +\d+ .*\n)+)", text)
    names = dict.fromkeys(row.split()[4] for row in rows.splitlines() if len(row.split()) > 4)
    dispersion = last_group(r"(?:DFT-?)(D[234](?:-?BJ)?)", text)
    return Level(
        usual_method(method), "+".join(usual_basis(name) for name in names), "", usual_dispersion(dispersion)
    )


TURBOMOLE = Program(
    name="Turbomole",
    reader="cclib.parser.turbomoleparser:Turbomole",
    phrases=("TURBOMOLE",),
    version=r"TURBOMOLE (?:rev\. )?(V\d[\w.()-]*)",
    begins=r"TURBOMOLE (?:rev\. )?V\d",
    ends=r"^ *\*{4} +\S+ : all done +\*{4}|^\s*\S+ ended normally",
    fails=r"ended abnormally",
    level=level,
    energies=(
        ("SCF", r"^ *\* +[RU]HF +energy\s*:\s*" + NUMBER),
        ("SCF", r"^ *\* +SCF-energy\s*:\s*" + NUMBER),
        ("SCF", r"^ *\| +total energy +=\s*" + NUMBER),
        ("MP2", r"^ *\* +Final MP2 energy\s*:\s*" + NUMBER),
        ("MP2-F12", r"^ *\* +Final MP2-F12 energy\s*:\s*" + NUMBER),
        ("CC2", r"^ *\* +Final CC2 energy\s*:\s*" + NUMBER),
        ("CCSD", r"^ *\* +Final CCSD energy\s*:\s*" + NUMBER),
        ("CCSD(T)", r"^ *\* +Final CCSD\(T\) energy\s*:\s*" + NUMBER),
        ("CCSD-F12", r"^ *\* +Final CCSD\(?F12\*?\)? energy\s*:\s*" + NUMBER),
    ),
    converged=r"CONVERGENCY CRITERIA FULFILLED|convergence criteria satisfied",
    spin_squared=r"<S\^2>\s*=?\s*" + NUMBER,
)
