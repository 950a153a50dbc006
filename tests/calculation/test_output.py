"""Bytes to text: compression told by content, and one clear message for what is no output."""

import bz2
import gzip
import lzma
from collections.abc import Callable
from pathlib import Path

import pytest

from rateloom.calculation import read_calculation
from rateloom.calculation.output import open_output
from rateloom.errors import CalculationError

OH = "Psi4-1.3.2/oh_uhf_ccsdt.out.gz"


@pytest.mark.parametrize(
    "compress", [bytes, gzip.compress, bz2.compress, lzma.compress], ids=["plain", "gzip", "bzip2", "xz"]
)
def test_compression_is_told_by_content_not_by_name(
    tmp_path: Path, text_of: Callable[[str], str], compress: Callable[[bytes], bytes]
) -> None:
    path = tmp_path / "misnamed.gz"
    path.write_bytes(compress(text_of(OH).encode()))

    assert read_calculation(str(path)).energy_hartree == -75.559272303286861  # the line `* CCSD(T) total energy`


def test_bytes_given_are_read_in_the_place_of_the_file(text_of: Callable[[str], str]) -> None:
    assert read_calculation("nowhere.out", text_of(OH).encode()).program == "Psi4"


def test_line_ends_of_other_systems_give_the_same_record(text_of: Callable[[str], str]) -> None:
    plain = text_of(OH)

    assert read_calculation("a", plain.replace("\n", "\r\n").encode()).energies_hartree == (
        read_calculation("a", plain.encode()).energies_hartree
    )


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "the file is empty"),
        (b" \n\n", "the file is empty"),
        (b"\x7fELF\x00\x00\x00\x00\x00\x00\x00\x00", "this is a binary file"),
        (gzip.compress(b"Psi4: An Open-Source Ab Initio" * 200)[:-20], "gzip data are damaged or cut short"),
        (bz2.compress(b"Psi4: An Open-Source Ab Initio" * 200)[:-20], "bzip2 data are damaged or cut short"),
        (lzma.compress(b"Psi4: An Open-Source Ab Initio" * 200)[:-20], "xz data are damaged or cut short"),
        (b"Dear all,\nplease find attached\n", "no known program printed this file (it begins 'Dear all,')"),
    ],
    ids=["empty", "blank", "binary", "gzip", "bzip2", "xz", "foreign"],
)
def test_what_is_no_output_is_named(tmp_path: Path, content: bytes, message: str) -> None:
    path = tmp_path / "a.out"
    path.write_bytes(content)

    with pytest.raises(CalculationError) as caught:
        read_calculation(str(path))

    assert str(caught.value).startswith(str(path))
    assert message in str(caught.value)


def test_missing_file_and_folder_are_named(tmp_path: Path) -> None:
    with pytest.raises(CalculationError, match="there is no such file"):
        read_calculation(str(tmp_path / "absent.out"))
    with pytest.raises(CalculationError, match="this is a folder"):
        read_calculation(str(tmp_path))


def test_positions_and_lines_belong_together() -> None:
    output = open_output("a", b"one\ntwo\n\nfour")

    assert [output.line(output.position(number)) for number in (1, 2, 3, 4)] == [1, 2, 3, 4]
    assert output.line(output.text.index("wo")) == 2
    assert "".join(output.lines()) == output.text
