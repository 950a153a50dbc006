"""Real outputs of twenty programs: each gives a right record or a clear error.

Expected are the counts of the index that comes with the outputs (made with cclib alone) and, read here by expressions
of our own, the numbers that the files print.
"""

import gzip
import re
from functools import cache
from pathlib import Path
from typing import Any

import numpy as np
import pytest
import yaml

from rateloom.calculation import Calculation, read_calculation
from rateloom.calculation.elements import mass
from rateloom.calculation.motion import rigid_share
from rateloom.errors import CalculationError

FOLDER = Path(__file__).resolve().parents[3] / "shared" / "outputs"
SMALL = 12_000
"""Compressed size up to which an output is read in the short run [bytes]."""
UNREADABLE = {
    "ADF/basicADF2013.01__mo_sp.adfout.gz": "cannot be read beyond line 1412",
    "ADF/ADF2004.01__mo_sp.adfout.gz": "cannot be read beyond line 1365",
    "CFOUR/basicCFOUR2.1__h2o.c4.gz": "cannot be read beyond line 1050",
    "Jaguar/Jaguar4.2__dvb_ir.out.gz": "cannot be read beyond line 12870",
    "Jaguar/Jaguar4.2__dvb_un_sp.out.gz": "cannot be read beyond line 943",
    "MOPAC/h2o-force.out.gz": "prints no geometry",
    "NBO/basicNBO7.0__basicORCA5.0__dvb_sp_un.nbo.out.gz": "cannot be read beyond line 1621",
    "ORCA/ORCA4.0__miniprint.out.gz": "compute without MiniPrint",
    "Psi4/Psi4-0.5__sample_psimrcc-fd-freq2.out.gz": "prints no geometry",
    "XTB/basicXTB6.7.1__1768_sdf.out.gz": "prints no geometry",
}
LISTED_WITH_ZEROS = ("NWChem/basicNWChem7.0__dvb_ir.out.gz", "NWChem/NWChem6.0__dvb_ir_hf.out.gz")
"""The index counts translations and rotations among the modes."""
NUMERICAL_NOISE = ("GAMESS/GAMESS-US2004__ex.out.gz", "Psi4/Psi4-0.5__sample_opt10.out.gz")
"""Rotations of up to 60 cm-1 are mixed with vibrations in the output itself."""
FREQUENCY_LINES = {
    "Gaussian": r"Frequencies --+(.*)",
    "ORCA": r"^ *\d+: +(-?\d+\.\d+) cm\*\*-1",
    "Q-Chem": r"^ *Frequency:(.*)",
    "NWChem": r"^ *\d+ +(-?\d+\.\d+) \|\|",
    "Turbomole": r"^ *frequency(.*)",
    "GAMESS": r"^ *FREQUENCY:(.*)",
    "Psi4": r"Freq \[cm\^-1\](.*)|^\s*\w+\s+(\d+\.\d+i?)\s*$",
}
ENERGY_LINES = {  # the last energy that each prints, for single geometries
    "Gaussian/basicGaussian16__dvb_ir.out.gz": r"SCF Done: .*= +(\S+) +A\.U\.",
    "Gaussian/Gaussian16__1615.log.gz": r"^ CCSD\(T\)= *(-0\S+)",
    "ORCA/ORCA4.2__water_dlpno_ccsd.out.gz": r"FINAL SINGLE POINT ENERGY +(\S+)",
    "ORCA/basicORCA6.0__dvb_dispersion_bp86_d3zero.out.gz": r"FINAL SINGLE POINT ENERGY +(\S+)",
    "QChem/basicQChem5.4__water_ccsd.out.gz": r"CCSD total energy += +(\S+)",
    "GAMESS/basicGAMESS-US2018__water_ccsd(t).out.gz": r"CCSD\(T\) ENERGY: +(\S+)",
    "Molpro/basicMolpro2018__h2o_ccsdt.out.gz": r"!CCSD\(T\) total energy +(\S+)",
    "Turbomole/basicTurbomole7.4__water_cc2__ricc2.out.gz": r"Final CC2 energy +: +(\S+)",
    "NWChem/basicNWChem7.0__dvb_ir.out.gz": r"Total DFT energy = +(\S+)",
    "Psi4/basicPsi4-1.7__water_ccsd(t).out.gz": r"\* CCSD\(T\) total energy += +(\S+)",
    "ORCA/basicORCA6.0__dvb_td.out.gz": r"^Total Energy +: +(\S+)",  # the final one is that of an excited state
}


def entries() -> list[dict[str, Any]]:
    index = FOLDER / "index.yaml"
    return yaml.safe_load(index.read_text()) if index.is_file() else []


def parameters() -> list[Any]:
    found = entries()
    long = pytest.mark.long
    return [pytest.param(entry, id=entry["file"], marks=() if size(entry) <= SMALL else long) for entry in found] or [
        pytest.param({}, id="absent")
    ]


def size(entry: dict[str, Any]) -> int:
    return (FOLDER / entry["file"]).stat().st_size


@cache
def text_of(name: str) -> str:
    return gzip.decompress((FOLDER / name).read_bytes()).decode("latin-1")


def numbers(text: str) -> set[float]:
    words = re.findall(r"-?\d*\.\d+(?:[DE][-+]\d+)?", text)
    return {float(word.replace("D", "E")) for word in words}


@pytest.mark.usefixtures("many_outputs")
@pytest.mark.parametrize("entry", parameters())
def test_real_output_gives_a_right_record_or_a_clear_error(entry: dict[str, Any]) -> None:
    name = entry["file"]
    path = str(FOLDER / name)
    if name in UNREADABLE:
        with pytest.raises(CalculationError, match=re.escape(UNREADABLE[name])):
            read_calculation(path)
        return

    record = read_calculation(path)

    assert entry["natom"] in (None, len(record.atoms))
    assert record.geometry_angstrom.shape == (len(record.atoms), 3)
    assert set(record.energies_hartree.values()) <= numbers(text_of(name)), "energies keep the digits printed"
    if entry["kind"] == "freq":
        check_frequencies(record, entry)


def check_frequencies(record: Calculation, entry: dict[str, Any]) -> None:
    found = record.frequencies_per_cm
    assert found is not None
    rigid = 6 if entry["file"] in LISTED_WITH_ZEROS else 0
    assert len(found) == entry["modes"] - rigid
    assert found[found < 0] == pytest.approx(entry["imaginary"], abs=0.006)  # the index is rounded
    assert np.all(np.diff(found) >= 0)
    lines = FREQUENCY_LINES.get(record.program)
    if lines:
        groups = re.findall(lines, text_of(entry["file"]), re.M)
        printed = numbers(
            " ".join(part for group in groups for part in ([group] if isinstance(group, str) else group))
        )
        assert {abs(value) for value in found} <= {abs(value) for value in printed}
    if record.displacements is not None and entry["file"] not in NUMERICAL_NOISE:
        masses = record.masses_u if record.masses_u is not None else np.array([mass(atom) for atom in record.atoms])
        share = rigid_share(record.displacements, record.geometry_angstrom, masses)
        # Displacements of two digits; a wrong frame or order of atoms gives 0.1 and more.
        assert share.max() < 0.01


@pytest.mark.parametrize("name", ENERGY_LINES)
def test_energy_taken_is_the_last_one_printed(many_outputs: Path, name: str) -> None:
    printed = re.findall(ENERGY_LINES[name], text_of(name), re.M)[-1]

    assert read_calculation(str(many_outputs / name)).energy_hartree == float(printed.replace("D", "E"))


@pytest.mark.long
def test_last_of_several_jobs_is_taken(many_outputs: Path) -> None:
    record = read_calculation(str(many_outputs / "QChem/QChem5.3__ts_30.out.gz"))

    assert [remark.code for remark in record.remarks] == ["several-jobs"]
    assert record.converged
    assert record.largest_gradient is None
    assert record.frequencies_per_cm is not None
    assert record.frequencies_per_cm[0] == -948.37  # of the job behind the search, not of the guess


@pytest.mark.parametrize(
    ("name", "level"),
    [
        pytest.param("Gaussian/Gaussian09__1080.out.gz", "wB97X-D/6-311++G** (Water)", marks=pytest.mark.long),
        pytest.param("Gaussian/Gaussian16__Benzene_anion.log.gz", "PBE0-D3BJ/6-31G**", marks=pytest.mark.long),
        ("Gaussian/Gaussian16__co_pbe1pbe_631ppGss.log.gz", "PBE0/6-31++G**"),
        ("ORCA/basicORCA6.0__dvb_dispersion_bp86_d3zero.out.gz", "BP86-D3/STO-3G"),
        ("ORCA/ORCA4.2__water_dlpno_ccsd.out.gz", "DLPNO-CCSD/STO-3G"),
        ("QChem/QChem4.4__678.out.gz", "wB97X-D3/6-311+G**"),
        ("GAMESS/GAMESS-US2008__2CO.ccsd.aug-cc-pVDZ.out.gz", "CCSD(T)/aug-cc-pVDZ"),
        ("Molpro/basicMolpro2018__h2o_ccsdt.out.gz", "CCSD(T)/cc-pVDZ"),
        ("NWChem/basicNWChem7.0__dvb_ir.out.gz", "B3LYP/STO-3G"),
    ],
)
def test_level_of_theory_is_spelled_alike(many_outputs: Path, name: str, level: str) -> None:
    assert str(read_calculation(str(many_outputs / name)).level) == level


def test_short_printing_leaves_the_multiplicity_to_the_input(many_outputs: Path) -> None:
    record = read_calculation(str(many_outputs / "ORCA/ORCA5.0__1177.out.gz"))

    assert (record.charge, record.multiplicity) == (1, 2)  # `* xyz 1 2` of the input; CH4+ has nine electrons


@pytest.mark.parametrize("name", ["CFOUR/basicCFOUR2.1__dvb_ir.c4.gz", "ADF/ADF2004.01__dvb_ir.adfout.gz"])
def test_end_of_a_step_is_not_the_end_of_the_output(many_outputs: Path, name: str) -> None:
    # Both print an end for each of their steps, or copy that of an earlier run.
    text = text_of(name)
    step = {"CFOUR": "@CHECKOUT-I, Total execution time", "ADF": "  NORMAL TERMINATION"}[name.split("/")[0]]
    place = text.index("\n", text.rindex(step, 0, len(text) // 2))

    try:
        record = read_calculation(str(many_outputs / name), text[:place].encode())
    except CalculationError:
        return
    assert not record.finished
