"""Writing the output folder."""

from pathlib import Path

import pytest

from rateloom.errors import OutputError
from rateloom.output.folder import read_file, write_files


def test_files_are_whole_and_nothing_else_is_left(tmp_path: Path) -> None:
    write_files(tmp_path, {"a.csv": b"1", "b.csv": b"2"})

    assert {path.name: path.read_bytes() for path in tmp_path.iterdir()} == {"a.csv": b"1", "b.csv": b"2"}


def test_a_folder_that_went_away_is_an_error_that_says_what_to_do(tmp_path: Path) -> None:
    with pytest.raises(OutputError, match=r"cannot be written: No such file or directory.*run again"):
        write_files(tmp_path / "gone", {"a.csv": b"1"})


def test_earlier_tables_stay_when_one_cannot_be_written(tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_bytes(b"old")

    with pytest.raises(OutputError):
        write_files(tmp_path, {"a.csv": b"new", "no/such/folder.csv": b"new"})

    assert [path.name for path in tmp_path.iterdir()] == ["a.csv"]
    assert read_file(tmp_path, "a.csv") == b"old"


def test_a_missing_file_reads_as_none(tmp_path: Path) -> None:
    assert read_file(tmp_path, "rates.csv") is None
