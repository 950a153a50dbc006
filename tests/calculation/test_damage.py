"""Outputs cut anywhere, damaged or joined: a record that says so or one kind of error, never anything else."""

import random
from collections.abc import Callable

import numpy as np
import pytest

from rateloom.calculation import Calculation, read_calculation
from rateloom.errors import CalculationError

OUTPUTS = (
    "NWChem7.0.2/h2o_several_tasks.out.gz",
    "NWChem7.0.2/h2o_mp2_then_ccsdt.out.gz",
    "Psi4-1.3.2/n2_opt_freq.out.gz",
    "Psi4-1.3.2/oh_uhf_ccsdt.out.gz",
)
DAMAGES: tuple[Callable[[str], str], ...] = (
    lambda line: line[: len(line) // 2],
    lambda line: line.replace(".", "x"),
    lambda line: line[::-1],
    lambda _line: "*******",
    lambda _line: "nan nan nan nan",
    lambda line: line + " 7",
    lambda _line: "",
)


@pytest.mark.parametrize("name", OUTPUTS)
def test_cut_output_is_never_finished(text_of: Callable[[str], str], name: str) -> None:
    text = text_of(name)
    where = random.Random(name)

    for _ in range(8):
        place = where.randrange(200, text.rstrip().rindex("\n"))
        try:
            record = read_calculation(name, text[:place].encode())
        except CalculationError:
            continue
        assert not record.finished, place
        assert "unfinished-calculation" in [remark.code for remark in record.remarks]


@pytest.mark.parametrize("name", OUTPUTS)
def test_damaged_lines_give_a_record_or_a_calculation_error(text_of: Callable[[str], str], name: str) -> None:
    lines = text_of(name).split("\n")
    where = random.Random(name)

    for _ in range(8):
        damaged = list(lines)
        for _ in range(4):
            place = where.randrange(len(lines))
            damaged[place] = where.choice(DAMAGES)(damaged[place])
        try:
            record = read_calculation(name, "\n".join(damaged).encode())
        except CalculationError:
            continue
        assert record.geometry_angstrom.shape == (len(record.atoms), 3)


def test_cut_inside_the_displacements_is_not_finished(text_of: Callable[[str], str]) -> None:
    text = text_of("NWChem7.0.2/h2o_several_tasks.out.gz")
    place = text.rindex("P.Frequency") + 200

    record = read_calculation("a", text[:place].encode())

    assert not record.finished


@pytest.mark.parametrize("name", OUTPUTS)
def test_output_printed_twice_gives_the_same_numbers(
    read: Callable[[str], Calculation], text_of: Callable[[str], str], name: str
) -> None:
    once, twice = read(name), read_calculation(name, text_of(name).encode() * 2)

    assert twice.finished
    assert twice.energies_hartree == once.energies_hartree
    assert np.array_equal(twice.geometry_angstrom, once.geometry_angstrom)
    if once.frequencies_per_cm is not None:
        assert twice.frequencies_per_cm is not None
        assert np.array_equal(twice.frequencies_per_cm, once.frequencies_per_cm)
        assert [remark.code for remark in twice.remarks] == ["several-jobs"]


def test_where_cclib_stops_is_named(text_of: Callable[[str], str]) -> None:
    lines = text_of("NWChem7.0.2/h2o_several_tasks.out.gz").split("\n")
    place = next(number for number, line in enumerate(lines) if "XYZ format geometry" in line)
    lines[place + 2] = "three"

    with pytest.raises(CalculationError) as caught:
        read_calculation("water.out", "\n".join(lines).encode())

    message = str(caught.value)
    assert message.startswith(f"water.out:{place + 3}: this NWChem output cannot be read beyond line {place + 3}")
    assert "'XYZ format geometry'" in message


def test_reading_prints_and_logs_nothing(
    text_of: Callable[[str], str], capfd: pytest.CaptureFixture[str], caplog: pytest.LogCaptureFixture
) -> None:
    text = text_of(OUTPUTS[0])

    read_calculation("a", text[: len(text) // 2].encode())

    assert capfd.readouterr() == ("", "")
    assert not caplog.records
