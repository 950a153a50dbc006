"""Constants of nature come from ``scipy.constants`` and nowhere else."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest
import scipy.constants
import yaml

HERE = Path(__file__).resolve().parent
ENTRIES = yaml.safe_load((HERE / "reference" / "constants.yaml").read_text(encoding="utf-8"))["entries"]
TAKEN = {
    "L-constant-k": scipy.constants.k,
    "L-constant-NA": scipy.constants.N_A,
    "L-constant-c": scipy.constants.c,
    "L-constant-e": scipy.constants.e,
    "L-constant-a0": scipy.constants.physical_constants["Bohr radius"][0],
    "L-constant-Eh": scipy.constants.physical_constants["Hartree energy"][0],
}
# digits by which a constant or a conversion gives itself away when it is typed: k, h, N_A, c, R, e, a0, u, hartree in
# J, eV, kcal/mol, kJ/mol and cm-1, h c/k, atm and calorie
DIGITS = (
    *("1380649", "13806", "662607", "602214", "299792", "831446", "831447", "160217", "529177", "166053"),
    *("435974", "272113", "272114", "6275094", "627509", "262549", "2194746", "143877", "101325", "4184"),
)
SOURCES = sorted((HERE.parent / "pipeline" / "rateloom").rglob("*.py"))


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in ENTRIES])
def test_constants_are_those_of_codata(entry: dict) -> None:
    assert TAKEN[entry["id"]] == pytest.approx(entry["value"], rel=entry["tolerance"]["size"])


def typed_numbers(path: Path) -> Iterator[tuple[int, str]]:
    """Line and significant digits of every number in a source."""
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Constant) and type(node.value) in (int, float):
            mantissa = f"{abs(node.value):.15g}".partition("e")[0]
            yield node.lineno, mantissa.replace(".", "").strip("0")


@pytest.mark.parametrize("path", SOURCES, ids=lambda path: str(path.relative_to(HERE.parent)))
def test_no_constant_is_typed_in_the_sources(path: Path) -> None:
    typed = [(line, digits) for line, digits in typed_numbers(path) if digits.startswith(DIGITS)]

    assert typed == []
