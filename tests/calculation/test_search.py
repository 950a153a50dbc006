"""Searching for words first finds what the expression alone finds."""

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rateloom.calculation.programs import PROGRAMS
from rateloom.calculation.programs.search import matches, needed_words, pattern

EXPRESSIONS = sorted(
    {
        expression
        for program in PROGRAMS
        for expression in (
            program.begins, program.ends, program.fails, program.version, program.masses, program.converged,
            program.not_converged, program.spin_squared, *(line for _, line in program.energies),
        )
        if expression
    }
)  # fmt: skip
SCRAPS = (
    "\n", "\n\n", "  ", " ", "=", "-76.01", ":", "Total SCF energy", "Total DFT energy", " Total times  cpu:",
    "energy", "* CCSD(T) total energy", "CCSD(T)", "MP2 Total Energy (a.u.)", "!RHF STATE 1.1 Energy",
    " Gaussian 09: x G09RevA.01",
    "Program Version 5.0", "ORCA TERMINATED NORMALLY**", "****", " Link1:  Proceeding to internal job step",
    "TERMINATED ", "GAMESS VERSION = 1,", " DISK USED", "TURBOMOLE V7", " : all done ",
    "Optimization converged", "<S2>", "x",
)  # fmt: skip


@pytest.mark.parametrize(
    ("expression", "words", "begins_line"),
    [
        (r"^\s*Total SCF energy\s*=\s*(\d)", ("Total SCF energy",), True),
        (r"CCSD\(T\) total energy", ("CCSD(T) total energy",), False),
        (r"^\s+over blank lines", ("over blank lines",), False),
        (r"^ begun|^ended: x?y", (" begun", "ended: "), True),
        (r"^ begun|ended", (" begun", "ended"), False),
        (r"^a.*\n.*words below", ("words below",), False),
        (r"(?i)anything", (), False),
        (r"^\d+ (?:alpha|beta)", (), False),
    ],
)
def test_words_are_those_that_every_match_holds(expression: str, words: tuple[str, ...], begins_line: bool) -> None:
    assert (needed_words(expression).words, needed_words(expression).begins_line) == (words, begins_line)


@settings(max_examples=60, deadline=None)
@given(st.lists(st.sampled_from(SCRAPS), max_size=40).map("".join))
def test_matches_are_those_of_the_expression_alone(text: str) -> None:
    for expression in EXPRESSIONS:
        alone = list(pattern(expression).finditer(text))
        found = list(matches(expression, text))

        assert [(match.end(), match.groups()) for match in found] == [
            (match.end(), match.groups()) for match in alone
        ]
