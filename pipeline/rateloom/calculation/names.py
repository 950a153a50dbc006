"""Usual spellings of methods and basis sets, so that one theory reads the same whatever program printed it."""

import re

FUNCTIONALS = (
    "HF", "LDA", "SVWN", "SVWN5", "BLYP", "BP86", "PBE", "PBE0", "revPBE", "RPBE", "B3LYP", "B3P86", "B3PW91",
    "BHandHLYP", "BHandH", "B97", "B97-1", "B97-2", "B97-3", "B97-D", "X3LYP", "O3LYP", "OLYP", "TPSS", "TPSSh",
    "revTPSS", "r2SCAN", "SCAN", "M05", "M05-2X", "M06", "M06-L", "M06-2X", "M06-HF", "M08-HX", "M08-SO", "M11",
    "MN12-L", "MN15", "MN15-L", "CAM-B3LYP", "LC-wPBE", "wB97", "wB97X", "wB97X-D", "wB97X-D3", "wB97X-V", "wB97M-V",
    "wB97X-D3BJ", "wB97M-D3BJ", "wB97X-D4", "HSE06", "mPW1K", "mPW1PW91", "mPWB1K", "MPW2PLYP", "BB1K", "BMK",
    "PW91", "PW6B95", "PWPB95", "B2PLYP", "B2GP-PLYP", "DSD-PBEP86", "DSD-BLYP", "revDSD-PBEP86", "PBEh-3c",
    "r2SCAN-3c", "B97-3c", "HF-3c",
)  # fmt: skip
CORRELATED = (
    "MP2", "SCS-MP2", "DLPNO-MP2", "MP3", "MP4", "MP4(SDQ)", "CCD", "CC2", "CCSD", "CCSD(T)", "CCSD-F12",
    "CCSD(T)-F12", "QCISD", "QCISD(T)", "BCCD", "BCCD(T)", "DLPNO-CCSD", "DLPNO-CCSD(T)", "DLPNO-CCSD(T1)", "CASSCF",
    "CASPT2", "NEVPT2", "MRCI", "CISD", "PM6", "PM7", "AM1", "PM3", "GFN2-xTB", "GFN1-xTB",
)  # fmt: skip
OTHER_SPELLINGS = {
    "PBE1PBE": "PBE0",
    "PBEPBE": "PBE",
    "BHLYP": "BHandHLYP",
    "BECKEHANDH": "BHandHLYP",
    "HARTREEFOCK": "HF",
    "RIMP2": "MP2",
    "DFMP2": "MP2",
    "B3LYPG": "B3LYP",
    "B3LYPVWN1RPA": "B3LYP",
    "PBEH1PBE": "PBEh",
    "B2PLYPD": "B2PLYP-D",
    "MPW1B95": "mPW1B95",
    "LSDA": "SVWN",
}


def bare(name: str) -> str:
    """Reduce a name to what distinguishes it."""
    return re.sub(r"[-_ ]", "", name).upper().replace("Ω", "W").replace("OMEGA", "W")


USUAL = {bare(name): name for name in (*FUNCTIONALS, *CORRELATED)} | OTHER_SPELLINGS
DISPERSIONS = {
    "GD3": "D3", "GD3BJ": "D3BJ", "GD2": "D2", "D3ZERO": "D3", "D3(BJ)": "D3BJ", "D3_BJ": "D3BJ", "D3-BJ": "D3BJ",
    "D3_ZERO": "D3", "EMPIRICAL_GRIMME": "D2", "EMPIRICAL_GRIMME3": "D3", "FALSE": "", "NONE": "", "0": "",
}  # fmt: skip
POPLE = re.compile(r"(\d-\d+)(\+{0,2})G(\*{0,2}|\([^)]*\))$", re.IGNORECASE)
DUNNING = re.compile(r"((?:d-|t-)?aug-|may-|jun-|jul-)?cc-p(w?c?)v(.)z(-.*|\(.*|)$", re.IGNORECASE)
KARLSRUHE = re.compile(r"(def2|def)[-_ ]?(m?a?-?)(SV|TZV|QZV)(\(P\)|PP|P|)(D?)(.*)$", re.IGNORECASE)


def usual_method(name: str) -> str:
    """Spell a method or functional as usual; an unknown one stays as printed.

    A prefix that tells restricted from unrestricted orbitals (R, U, RO) is left out, for it follows from the species.
    """
    name = name.strip()
    for candidate in (name, re.sub(r"^(?:RO|R|U)-?(?=[A-Za-z])", "", name, flags=re.IGNORECASE)):
        if bare(candidate) in USUAL:
            return USUAL[bare(candidate)]
    return name


def usual_basis(name: str) -> str:
    """Spell a basis set as usual; an unknown one stays as printed."""
    name = name.strip().strip("\"'")
    if match := POPLE.match(name):
        core, diffuse, polarisation = match.groups()
        stars = {"(D)": "*", "(D,P)": "**"}.get(polarisation.upper().replace(" ", ""), polarisation.lower())
        return f"{core}{diffuse}G{stars}"
    if match := DUNNING.match(name):
        augmented, core, zeta, rest = match.groups()
        return f"{(augmented or '').lower()}cc-p{core.lower().replace('c', 'C')}V{zeta.upper()}Z{rest.upper()}"
    if match := KARLSRUHE.match(name):
        family, augmented, size, polarisation, diffuse, rest = match.groups()
        minimal = augmented.lower().replace("-", "")
        prefix = f"{minimal}-" if minimal else ""
        return f"{prefix}{family.lower()}-{size.upper()}{polarisation.upper()}{diffuse.upper()}{rest}"
    if bare(name) == "STO3G":
        return "STO-3G"
    return name


def known_method(word: str) -> str:
    """Spell a word of an input as usual if it names a method or functional, else give nothing."""
    name = usual_method(word)
    return name if bare(name) in USUAL or name in USUAL.values() else ""


def usual_dispersion(word: str) -> str:
    """Spell a dispersion correction as usual."""
    return DISPERSIONS.get(word.upper(), word.upper())
