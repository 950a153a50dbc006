"""Numbers of a paper as a record; a record as text and as JSON; the command that shows them."""

import argparse
import json
from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from rateloom.calculation import Calculation, as_json_dict, describe, given_calculation
from rateloom.cli import show

SADDLE = "NWChem7.0.2/ts_h2_h_saddle.out.gz"
CONTRACT = {
    "program", "program_version", "level", "charge", "multiplicity", "atoms", "geometry_angstrom",
    "energies_hartree", "energy_kind", "frequencies_per_cm", "finished",
}  # fmt: skip
OUTPUTS = Path(__file__).parent / "outputs"


def water() -> Calculation:
    return given_calculation(
        energy_hartree=-76.4,
        atoms=("O", "H", "H"),
        geometry_angstrom=((0, 0, 0.117), (0, 0.757, -0.469), (0, -0.757, -0.469)),
        multiplicity=1,
        frequencies_per_cm=(3942.0, 1648.0, 3832.0),
        level="CCSD(T)/CBS, a paper",
    )


def test_given_numbers_make_a_finished_record() -> None:
    record = water()

    assert record.finished
    assert record.energy_hartree == -76.4
    assert record.frequencies_per_cm is not None
    assert list(record.frequencies_per_cm) == [1648.0, 3832.0, 3942.0]
    assert str(record.level) == "CCSD(T)/CBS, a paper"


def test_given_atom_has_no_frequencies() -> None:
    record = given_calculation(energy_hartree=-0.5, atoms=("H",), geometry_angstrom=((0, 0, 0),), multiplicity=2)

    assert record.frequencies_per_cm is None
    assert record.geometry_angstrom.shape == (1, 3)


def test_given_positions_must_match_the_atoms() -> None:
    with pytest.raises(ValueError, match="there are 2 atoms and 1 positions"):
        given_calculation(energy_hartree=0, atoms=("H", "H"), geometry_angstrom=((0, 0, 0),), multiplicity=1)


def test_json_holds_the_contract_and_survives_a_round_trip(read: Callable[[str], Calculation]) -> None:
    record = read(SADDLE)
    found = json.loads(json.dumps(as_json_dict(record), allow_nan=False))

    assert found.keys() >= CONTRACT
    assert found["energies_hartree"] == record.energies_hartree
    assert np.array_equal(found["frequencies_per_cm"], record.frequencies_per_cm)
    assert np.array_equal(found["geometry_angstrom"], record.geometry_angstrom)


def test_description_tells_what_a_chemist_asks_first(read: Callable[[str], Calculation]) -> None:
    text = describe(read(SADDLE))

    for words in ("NWChem 7.0.2", "BHandHLYP/6-31G**", "-1.6551974710 hartree (taken)", "1231.80i", "1 imaginary"):
        assert words in text
    assert {len(line) - len(line.lstrip()) for line in text.splitlines() if "hartree" in line} == {2}


def test_show_prints_json_of_one_file_as_an_object(capsys: pytest.CaptureFixture[str]) -> None:
    assert show.run(argparse.Namespace(files=[str(OUTPUTS / SADDLE)], json=True, largest_file=10)) == 0

    assert json.loads(capsys.readouterr().out)["multiplicity"] == 2


def test_show_goes_on_after_a_file_it_cannot_read(capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
    missing = str(tmp_path / "absent.out")

    assert show.run(argparse.Namespace(files=[missing, str(OUTPUTS / SADDLE)], json=False, largest_file=10)) == 2

    captured = capsys.readouterr()
    assert missing in captured.err
    assert "BHandHLYP" in captured.out
