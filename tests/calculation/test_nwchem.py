"""NWChem outputs: several tasks, saddle searches, wave functions, restarts."""

import re
from collections.abc import Callable

import numpy as np
import pytest

from rateloom.calculation import Calculation, read_calculation
from rateloom.calculation.normal_modes import modes_of_hessian
from rateloom.errors import CalculationError

Reader = Callable[[str], Calculation]
Text = Callable[[str], str]
FOLDER = "NWChem7.0.2/"
SADDLE = FOLDER + "ts_h2_h_saddle.out.gz"
WATER = FOLDER + "h2o_several_tasks.out.gz"
NEARLY_LINEAR = FOLDER + "ts_h2_o_nearly_linear.out.gz"


def last(expression: str, text: str) -> float:
    return float(re.findall(expression, text)[-1])


def test_saddle_search_and_its_frequencies(read: Reader, text_of: Text) -> None:
    saddle, text = read(SADDLE), text_of(SADDLE)

    assert saddle.program_version == "7.0.2"
    assert str(saddle.level) == "BHandHLYP/6-31G**"  # printed as three components
    assert (saddle.charge, saddle.multiplicity, saddle.finished, saddle.converged) == (0, 2, True, True)
    assert saddle.frequencies_per_cm is not None
    printed = [float(word) for line in re.findall(r"P\.Frequency(.*)", text) for word in line.split()]
    assert saddle.frequencies_per_cm == pytest.approx(sorted(x for x in printed if abs(x) > 1), abs=0.006)  # rounded
    assert saddle.spin_squared == last(r"<S2> = +(\S+)", text)


def test_energy_is_that_of_the_frequency_task_with_all_digits(read: Reader, text_of: Text) -> None:
    text = text_of(SADDLE)
    energy = last(r"Total DFT energy = +(\S+)", text)

    # The last step of the search ends with another last digit: cclib alone gives that one.
    assert read(SADDLE).energies_hartree == {"DFT": energy}
    assert energy != last(r"(?s)Total DFT energy = +(\S+)(?=.*NWChem Nuclear Hessian)", text)


def test_geometry_is_the_one_of_the_frequencies(read: Reader, text_of: Text) -> None:
    saddle = read(SADDLE)
    block = text_of(SADDLE).split("Atom information")[1].splitlines()[3:6]
    bohr = np.array([[float(word.replace("D", "E")) for word in line.split()[2:5]] for line in block])

    assert saddle.geometry_angstrom == pytest.approx(bohr * 0.529177249, abs=1e-7)  # 8 digits, NWChem's own bohr
    assert saddle.optimised_geometry_angstrom == pytest.approx(saddle.geometry_angstrom, abs=0)


@pytest.mark.parametrize("name", [SADDLE, WATER])
def test_hessian_gives_the_printed_frequencies(read: Reader, name: str) -> None:
    record = read(name)
    assert record.hessian is not None
    assert record.masses_u is not None

    frequencies, _ = modes_of_hessian(record.hessian, record.geometry_angstrom, record.masses_u)

    # Six digits of the Hessian, and NWChem's constants of nature.
    assert frequencies == pytest.approx(record.frequencies_per_cm, rel=2e-4)


def test_vibration_lost_by_the_projection_is_restored(read: Reader, text_of: Text) -> None:
    record = read(NEARLY_LINEAR)
    raw = [float(w) for line in re.findall(r"^ Frequency(.*)", text_of(NEARLY_LINEAR), re.M) for w in line.split()]

    assert [remark.code for remark in record.remarks] == ["frequencies-from-hessian"]
    # The unprojected list: rigid motions are below 40 cm-1 there and hardly mix with vibrations.
    assert record.frequencies_per_cm == pytest.approx([x for x in raw if abs(x) > 40], abs=0.5)


def test_restricted_open_shell_doublet_is_no_triplet(read: Reader) -> None:
    record = read(FOLDER + "oh_rohf.out.gz")

    assert record.multiplicity == 2
    assert record.energies_hartree == {"SCF": -74.177105511424}  # `Total SCF energy`


def test_unrestricted_multiplicity_comes_from_the_electrons(read: Reader) -> None:
    record = read(FOLDER + "oh_uhf_tce_ccsdt.out.gz")

    assert record.multiplicity == 2
    assert record.energies_hartree == {
        "SCF": -74.362669187625,
        "CCSD": -74.387184192616971,
        "CCSD(T)": -74.387184422636537,
    }
    assert str(record.level) == "CCSD(T)/STO-3G"
    assert record.energy_kind == "CCSD(T)"


def test_two_tasks_at_one_geometry_give_the_higher_level(read: Reader) -> None:
    record = read(FOLDER + "h2o_mp2_then_ccsdt.out.gz")

    assert record.energy_hartree == -75.012388428133505
    assert record.energies_hartree["MP2"] == -74.99844949438
    assert "also there: CCSD, MP2, SCF" in record.energy_reason


def test_restart_without_a_geometry_says_what_to_add(read: Reader) -> None:
    with pytest.raises(CalculationError, match="repeat the `geometry` block in its input"):
        read(FOLDER + "h2o_restarted_frequencies.out.gz")


def test_first_frequencies_with_a_later_job_cut_are_not_finished(text_of: Text) -> None:
    text = text_of(WATER)

    record = read_calculation("a", (text + text[: len(text) // 2]).encode())

    assert not record.finished
    assert record.frequencies_per_cm is not None
    assert "unfinished-calculation" in [remark.code for remark in record.remarks]


def test_search_out_of_steps_is_not_converged(text_of: Text) -> None:
    text = text_of(SADDLE)
    start = text.index("Optimization converged")
    stopped = text[:start] + "Failed to converge in maximum number of steps or available time\n"

    record = read_calculation("a", stopped.encode())

    assert record.converged is False
    assert {"not-converged", "unfinished-calculation"} <= {remark.code for remark in record.remarks}
