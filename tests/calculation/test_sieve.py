"""The sieve in front of cclib changes no record, and lets through what it does not know."""

import gzip
from pathlib import Path
from typing import Any

import pytest

from rateloom.calculation import Calculation, read_calculation
from rateloom.calculation.programs import PROGRAMS, recognise
from rateloom.calculation.sieve import sieve_of
from rateloom.engine import encode
from rateloom.errors import CalculationError

ROOT = Path(__file__).resolve().parents[2]
OWN = Path(__file__).parent / "outputs"
SMALL = 12_000
"""Compressed size up to which an output is read in the short run [bytes]."""
SIEVED = ("NWChem", "Psi4", "ORCA", "Gaussian", "Q-Chem", "GAMESS")


def all_outputs() -> list[Any]:
    folders = OWN, ROOT / "sample_outputs" / "calculations", ROOT.parent / "shared" / "outputs"
    found = sorted(path for folder in folders for path in folder.glob("**/*.gz"))
    large = pytest.mark.long
    return [
        pytest.param(path, id=f"{path.parent.name}/{path.name}", marks=() if path.stat().st_size <= SMALL else large)
        for path in found
    ]


def record_or_message(path: Path, *, sieve: bool) -> tuple[Calculation | None, str]:
    try:
        return read_calculation(str(path), sieve=sieve), ""
    except CalculationError as error:
        return None, str(error)


@pytest.mark.parametrize("path", all_outputs())
def test_record_is_the_same_without_the_sieve(path: Path) -> None:
    program = recognise(gzip.decompress(path.read_bytes()).decode("latin-1"))
    if program is None or sieve_of(program) is None:
        pytest.skip("the table of this program names no idle lines")
    (sieved, message), (whole, message_whole) = (record_or_message(path, sieve=sieve) for sieve in (True, False))

    assert message == message_whole
    if sieved is not None and whole is not None:
        # Bytes of every field: floating-point numbers to the last digit, remarks with their line numbers.
        assert encode(sieved) == encode(whole)


def test_programs_with_a_sieve_are_those_for_which_it_was_measured() -> None:
    assert tuple(program.name for program in PROGRAMS if sieve_of(program)) == SIEVED


@pytest.mark.parametrize("program", [program for program in PROGRAMS if sieve_of(program)], ids=lambda p: p.name)
@pytest.mark.parametrize(
    "line",
    [
        " SCF Done:  E(RB3LYP) =  -40.5183    A.U. after   9 cycles\n",
        "         Total DFT energy =      -40.480278\n",
        "  new heading 1.0\n",
        " Frequencies --  1359.8  1360.1\n",
        "                         * O   R   C   A *\n",
        "  -----------------\n",
        "      FREQUENCY:       151.10 I      20.11\n",
    ],
)
def test_unknown_lines_and_headings_pass(program: Any, line: str) -> None:
    idle = sieve_of(program)

    assert idle is not None
    assert not idle(line)


@pytest.mark.parametrize("line", ["\n", "   \n", "   1   0.5 -0.25 1.0E-05\n", "  6   C   0.1  0.2  0.3\n"])
def test_rows_of_numbers_are_idle(line: str) -> None:
    for program in PROGRAMS:
        idle = sieve_of(program)
        assert idle is None or idle(line)


def test_messages_keep_the_line_numbers_of_the_file() -> None:
    text = gzip.decompress((OWN / "NWChem7.0.2/h2o_several_tasks.out.gz").read_bytes()).decode()
    lines = text.split("\n")
    place = max(number for number, line in enumerate(lines) if "XYZ format geometry" in line)
    lines[place + 2] = "three"

    with pytest.raises(CalculationError, match=f"^water.out:{place + 3}: "):
        read_calculation("water.out", "\n".join(lines).encode())
