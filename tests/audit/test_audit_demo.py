"""Real outputs: sound calculations of the demo give no error, the broken ones the right one."""

from functools import cache
from pathlib import Path

import pytest

from rateloom.audit import CODES, Limits, Member, Members, calculation_remarks, reaction_remarks, species_remarks
from rateloom.calculation import Calculation, read_calculation
from rateloom.remarks import Remark
from rateloom.statmech import Choices, assemble

FOLDER = Path(__file__).resolve().parents[2] / "sample_outputs" / "calculations"
LIMITS = Limits()
PAIRS = ("h2", "oh", "h2o", "nh3", "ch3", "ts_h2_oh", "ts_nh3_h")


@cache
def read(stem: str) -> Calculation:
    path = FOLDER / f"{stem}.out.gz"
    if not path.is_file():
        pytest.skip(f"the demo has no {path.name} yet")
    return read_calculation(str(path))


def remarks(stem: str, energy: str = "") -> tuple[Remark, ...]:
    is_saddle = stem.rpartition("/")[2].startswith("ts")
    frequencies, other = read(stem), read(energy or f"{stem}_ccsdt")
    species = assemble(frequencies, other, Choices(), is_saddle=is_saddle).species
    return (
        *calculation_remarks(frequencies, other, LIMITS, is_saddle=is_saddle),
        *species_remarks(frequencies, other, species, LIMITS, is_saddle=is_saddle),
    )


@pytest.mark.parametrize("stem", PAIRS)
def test_sound_calculations_have_no_errors(stem: str) -> None:
    assert [remark for remark in remarks(stem) if CODES[remark.code] == "error"] == []


def test_swapped_files_are_found() -> None:
    assert "geometries-differ" in [remark.code for remark in remarks("ts_nh3_h", "broken/ts_nh3_h_unconverged")]


@pytest.mark.parametrize(
    ("stem", "energy", "code"),
    [
        ("broken/nh3_planar", "nh3_ccsdt", "imaginary-mode-in-minimum"),
        ("broken/nh3_planar", "nh3_ccsdt", "geometries-differ"),
        ("broken/ts_h2o_oh_planar", "broken/ts_h2o_oh_planar_ccsdt", "second-imaginary-mode"),
    ],
)
def test_broken_calculations_have_the_right_error(stem: str, energy: str, code: str) -> None:
    assert code in [remark.code for remark in remarks(stem, energy)]


def test_a_real_reaction_has_one_level_and_one_program() -> None:
    def member(stem: str) -> Member:
        frequencies, energy = None if stem == "h" else read(stem), read(f"{stem}_ccsdt")
        made = assemble(frequencies, energy, Choices(), is_saddle=stem.startswith("ts"))
        assert made.species is not None
        assert made.facts is not None
        return Member(
            stem,
            made.species,
            made.facts.geometry_level if frequencies else "",
            made.facts.energy_level,
            frequencies.program if frequencies else "",
            frequencies.program_version if frequencies else "",
            energy.program,
            energy.program_version,
        )

    members = Members((member("h2"), member("oh")), (member("h2o"), member("h")), member("ts_h2_oh"))

    assert reaction_remarks(members, LIMITS) == ()
