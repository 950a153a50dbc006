"""Programs of which cclib's numbers are taken as they are; each has its heading and its line of a normal end."""

from typing import Any

from rateloom.calculation.names import usual_basis, usual_method
from rateloom.calculation.programs.program import Program
from rateloom.calculation.record import Level


def level(_text: str, kind: str, metadata: dict[str, Any]) -> Level:
    """Take what cclib noted."""
    methods = [str(method) for method in metadata.get("methods", ())]
    functional = str(metadata.get("functional", ""))
    method = (functional or "DFT") if kind == "DFT" else "HF" if kind == "SCF" else kind
    if kind == "semiempirical":
        method = methods[-1] if methods else ""
    return Level(usual_method(method), usual_basis(str(metadata.get("basis_set", ""))))


OTHERS = (
    Program(
        name="ADF",
        reader="cclib.parser.adfparser:ADF",
        phrases=("Amsterdam Density Functional  (ADF)",),
        begins=r"Amsterdam Density Functional  \(ADF\)",
        # The log of an earlier run of the same job may be copied in front.
        ends=r"A D F   E X I T *\n *NORMAL TERMINATION",
        level=level,
    ),
    Program(
        name="CFOUR",
        reader="cclib.parser.cfourparser:CFOUR",
        phrases=("* CFOUR Coupled-Cluster techniques for Computational Chemistry *",),
        # Each of its programs prints its own end before.
        ends=r"^ *This computation required",
        level=level,
    ),
    Program(
        name="Dalton",
        reader="cclib.parser.daltonparser:DALTON",
        phrases=("Dalton - An Electronic Structure Program",),
        ends=r"^ *>>>>? +Total wall time used in DALTON|Total CPU +time used in DALTON",
        level=level,
    ),
    Program(
        name="GAMESS-UK",
        reader="cclib.parser.gamessukparser:GAMESSUK",
        phrases=("G A M E S S - U K",),
        ends=r"^ *end of +G A M E S S|normal end of program|end of execution",
        level=level,
    ),
    Program(
        name="Jaguar",
        reader="cclib.parser.jaguarparser:Jaguar",
        phrases=("|  Jaguar version",),
        ends=r"^ ?Job .* completed on",
        level=level,
    ),
    Program(
        name="MOPAC",
        reader="cclib.parser.mopacparser:MOPAC",
        phrases=("Cite this program as: MOPAC",),
        ends=r"== MOPAC DONE ==",
        level=level,
    ),
    Program(
        name="OpenMolcas",
        reader="cclib.parser.molcasparser:Molcas",
        phrases=("()  ()", "This run of MOLCAS", "Project: molcas", "MOLCAS executing"),
        ends=r"Happy landing|^ *Timing: Wall=",
        level=level,
    ),
    Program(
        name="NBO",
        reader="cclib.parser.nboparser:NBO",
        phrases=("N A T U R A L   A T O M I C   O R B I T A L   A N D",),
        ends=r"NBO analysis completed",
        level=level,
    ),
    Program(
        name="Psi3",
        reader="cclib.parser.psi3parser:Psi3",
        phrases=("PSI3: An Open-Source Ab Initio Electronic Structure Package",),
        ends=r"^\s*PSI3 exiting",
        level=level,
    ),
    Program(
        name="Serenity",
        reader="cclib.parser.serenityparser:Serenity",
        phrases=("Serenity                                   #",),
        ends=r"^ *Time taken for the entire run",
        level=level,
    ),
    Program(
        name="xTB",
        reader="cclib.parser.xtbparser:XTB",
        phrases=("x T B   ",),
        ends=r"^ \* finished run on",
        level=level,
    ),
)
