"""Outputs computed for these tests, by program and version, and a reader that reads each file once a session."""

import gzip
from collections.abc import Callable
from functools import cache
from pathlib import Path

import pytest

from rateloom.calculation import Calculation, read_calculation

OUTPUTS = Path(__file__).parent / "outputs"


@cache
def read_once(path: str) -> Calculation:
    return read_calculation(path)


@pytest.fixture(scope="session")
def read() -> Callable[[str], Calculation]:
    """Reads an output of this folder."""
    return lambda name: read_once(str(OUTPUTS / name))


@pytest.fixture(scope="session")
def text_of() -> Callable[[str], str]:
    """Gives the text of an output of this folder."""
    return lambda name: gzip.decompress((OUTPUTS / name).read_bytes()).decode()
