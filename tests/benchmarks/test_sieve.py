"""What does the sieve in front of cclib save, and what does reading cost beside cclib alone?"""

import contextlib
import gzip
import importlib
import io
import logging
import time
import warnings
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from rateloom.calculation import read_calculation
from rateloom.calculation.output import open_output
from rateloom.calculation.programs import recognise

ROOT = Path(__file__).resolve().parents[2]
DEMO = ROOT / "sample_outputs" / "calculations"
MANY = ROOT.parent / "shared" / "outputs"
FILES = {
    "NWChem": DEMO / "ts_nh3_h.out.gz",
    "Psi4": MANY / "Psi4" / "Psi4-1.0__dvb_ir_rhf.out.gz",
    "Gaussian": MANY / "Gaussian" / "Gaussian16__Benzene_anion.log.gz",
    "GAMESS": MANY / "GAMESS" / "GAMESS-US2012__dvb_ir.out.gz",
    "ORCA": MANY / "ORCA" / "basicORCA6.0__dvb_gopt.out.gz",
    "Q-Chem": MANY / "QChem" / "QChem4.3__R_propylene_oxide_freq_ccsd.out.gz",
}
REPAIRED = ("Psi4",)
"""cclib's own class stops at the beginning of the file."""
ROUNDS = 5
SMALL_MEGABYTES = 0.1
"""Of smaller files the fixed cost of a record is a larger share than reading."""


def cclib_alone(path: Path, data: bytes) -> None:
    """Read with cclib's own class and its own loop."""
    output = open_output(path.name, data)
    program = recognise(output.text)
    assert program is not None
    module, name = program.reader.split(":")
    reader: Any = getattr(importlib.import_module(module), name)
    if program.name not in REPAIRED:
        reader = next(kind for kind in reader.__mro__ if kind.__module__.startswith("cclib."))
    text = output.text if program.mend is None else "".join(map(program.mend, output.lines()))
    with warnings.catch_warnings(), contextlib.redirect_stdout(io.StringIO()):
        warnings.simplefilter("ignore")
        reader(io.StringIO(text), loglevel=logging.CRITICAL + 10).parse()


def best(works: list[Callable[[], object]]) -> list[float]:
    """Least processor time of each, measured in turns [s]."""
    spent = [float("inf")] * len(works)
    for _ in range(ROUNDS):
        for index, work in enumerate(works):
            begin = time.process_time()
            work()
            spent[index] = min(spent[index], time.process_time() - begin)
    return spent


@pytest.mark.benchmark
@pytest.mark.parametrize("program", FILES)
def test_reading_costs_no_more_than_cclib(program: str) -> None:
    path = FILES[program]
    if not path.exists():
        pytest.skip(f"{path.name} is not on this machine")
    data = gzip.decompress(path.read_bytes())
    read_calculation(path.name, data)  # imports

    sieved, whole, alone = best(
        [
            lambda: read_calculation(path.name, data),
            lambda: read_calculation(path.name, data, sieve=False),
            lambda: cclib_alone(path, data),
        ]
    )

    print(
        f"\n{program}, {len(data) / 1e6:.2f} MB: with the sieve {sieved:.3f} s, without {whole:.3f} s, "
        f"cclib alone {alone:.3f} s; sieve saves {1 - sieved / whole:.0%}, "
        f"ratios to cclib alone {sieved / alone:.2f} and {whole / alone:.2f}"
    )
    if len(data) > SMALL_MEGABYTES * 1e6:
        assert sieved < 1.1 * alone
        assert sieved < whole
