"""Shared fixtures: the demo's outputs, a small job of them, and outputs of many programs where they are at hand."""

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]


@pytest.fixture(scope="session")
def calculations() -> Path:
    """Folder of the demo's real outputs."""
    return ROOT / "sample_outputs" / "calculations"


@pytest.fixture(scope="session")
def many_outputs() -> Path:
    """Folder of real outputs of many programs, beside the checkout; skips where it is absent."""
    folder = ROOT.parent / "shared" / "outputs"
    if not folder.is_dir():
        pytest.skip("the outputs of many programs (../shared/outputs) are not on this machine")
    return folder


JOB = """\
title: Hydrogen and methane
calculations: calculations
output: tables
temperatures: {from: 500 K, to: 2000 K, count: 8, spacing: reciprocal}
species:
  H: {energy: h_ccsdt.out.gz}
  H2: {frequencies: h2.out.gz, energy: h2_ccsdt.out.gz}
  CH3: {frequencies: ch3.out.gz, energy: ch3_ccsdt.out.gz}
  CH4: {frequencies: ch4.out.gz, energy: ch4_ccsdt.out.gz}
transition_states:
  ts-h2-h: {frequencies: ts_h2_h.out.gz, energy: ts_h2_h_ccsdt.out.gz}
  ts-ch4-h: {frequencies: ts_ch4_h.out.gz, energy: ts_ch4_h_ccsdt.out.gz}
reactions:
  h2-h: {equation: H + H2 <=> H2 + H, transition_state: ts-h2-h}
  ch4-h: {equation: CH4 + H <=> CH3 + H2, transition_state: ts-ch4-h}
"""
FILES = ("h", "h2", "ch3", "ch4", "ts_h2_h", "ts_ch4_h")


@pytest.fixture(scope="session")
def lay_out(calculations: Path) -> Callable[[Path], Path]:
    """Write the job file and copies of its calculations into a folder; gives the job file."""

    def write(folder: Path) -> Path:
        (folder / "calculations").mkdir(parents=True)
        for name in FILES:
            for file in (f"{name}.out.gz", f"{name}_ccsdt.out.gz"):
                if (calculations / file).exists():
                    shutil.copy(calculations / file, folder / "calculations" / file)
        path = folder / "job.yaml"
        path.write_text(JOB)
        return path

    return write


@pytest.fixture
def job(tmp_path: Path, lay_out: Callable[[Path], Path]) -> Path:
    """The job file; its calculations are copies, its tables go into ``tables``."""
    return lay_out(tmp_path)


@pytest.fixture
def quiet() -> Callable[[int, int, str], None]:
    """A progress report that says nothing."""
    return lambda _done, _total, _last: None
