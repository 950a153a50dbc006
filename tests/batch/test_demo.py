"""The demo: real calculations of a whole mechanism to the tables that stand in ``sample_outputs/tables``."""

import csv
from collections.abc import Callable
from pathlib import Path

import pytest

from rateloom.batch import Summary, run_job

TABLES = ("rates.csv", "arrhenius.csv", "species.csv", "equilibrium.csv", "audit.csv")
ROOT = Path(__file__).resolve().parents[2]


@pytest.fixture(scope="module")
def demo(tmp_path_factory: pytest.TempPathFactory) -> tuple[Path, Summary]:
    """Run the demo once; where its tables are, and what it says."""
    folder = tmp_path_factory.mktemp("demo")
    job = str(ROOT / "configs" / "cofiring.yaml")
    return folder, run_job(job, output=str(folder), workers=2, progress=lambda *_: None)


def cells(path: Path) -> list[list[str]]:
    with path.open(newline="") as file:
        return list(csv.reader(file))


def as_number(cell: str) -> float | None:
    try:
        return float(cell)
    except ValueError:
        return None


@pytest.mark.parametrize("table", TABLES)
def test_the_demo_gives_the_tables_that_are_kept(demo: tuple[Path, Summary], table: str) -> None:
    """Numbers to 1e-6 relative, far above rounding and far below any change of method; text exactly."""
    found, kept = cells(demo[0] / table), cells(ROOT / "sample_outputs" / "tables" / table)

    assert len(found) == len(kept)
    for new, old in zip(found, kept, strict=True):
        for ours, theirs in zip(new, old, strict=True):
            number = as_number(theirs)
            if number is None:
                assert ours == theirs
            else:
                assert float(ours) == pytest.approx(number, rel=1e-6, abs=1e-300)


def test_the_demo_delivers_every_reaction(demo: tuple[Path, Summary]) -> None:
    assert demo[1].delivered >= 20
    assert demo[1].withheld == {}


def test_the_demo_has_no_error_and_no_accepted_finding(demo: tuple[Path, Summary]) -> None:
    assert demo[1].findings["error"] == demo[1].findings["accepted"] == 0


@pytest.mark.parametrize(
    ("reaction", "codes"),
    [
        ("truncated", {"unfinished-calculation"}),
        ("unconverged", {"not-converged"}),
        ("two-imaginary-modes", {"second-imaginary-mode"}),
        ("saddle-as-species", {"imaginary-mode-in-minimum"}),
        ("methyl-rotation", {"imaginary-mode-off-reaction"}),
    ],
)
def test_each_broken_calculation_is_withheld_for_what_is_wrong_with_it(
    broken: Summary, reaction: str, codes: set[str]
) -> None:
    assert codes <= {reason.split(": ")[1] for reason in broken.withheld[reaction]}


@pytest.fixture(scope="module")
def broken(tmp_path_factory: pytest.TempPathFactory) -> Summary:
    """Run the job of broken calculations once."""
    job = str(ROOT / "configs" / "broken.yaml")
    folder = str(tmp_path_factory.mktemp("broken"))
    return run_job(job, output=folder, workers=1, progress=lambda *_: None)


def test_what_is_whole_among_broken_calculations_is_delivered(broken: Summary) -> None:
    assert broken.delivered == 1
    assert "whole" not in broken.withheld


def test_every_example_runs(tmp_path: Path, quiet: Callable[[int, int, str], None]) -> None:
    for job in sorted((ROOT / "configs").glob("*.yaml")):
        if "reactions:" in job.read_text() and job.stem not in {"broken", "cofiring"}:
            summary = run_job(str(job), output=str(tmp_path / job.stem), workers=1, progress=quiet)
            assert summary.withheld == {}, job.name
