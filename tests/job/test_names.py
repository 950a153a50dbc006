"""Names and equations."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from rateloom.job.names import MAX_PRODUCTS, MAX_REACTANTS, PATTERN, name_fault, parse_equation
from rateloom.job.problems import Fault

NAMES = st.from_regex(PATTERN, fullmatch=True).filter(lambda name: not name.endswith("."))


@pytest.mark.parametrize("name", ["CH4", "H3O+", "OH-", "(CH3)2CO", "1-C3H7", "CH2(1)", "n2h2_trans", "CH3*", "x.y"])
def test_usual_names_pass(name: str) -> None:
    assert name_fault(name) is None


@pytest.mark.parametrize(
    "name", ["", "a b", "a/b", "..", ".x", "x.", "-x", "x" * 65, "a\n", "é", "a\\b", "a:b", "<i>"]
)
def test_other_names_are_refused(name: str) -> None:
    assert name_fault(name) is not None


@pytest.mark.parametrize(
    ("text", "reactants", "products"),
    [
        ("CH4 + H <=> CH3 + H2", ("CH4", "H"), ("CH3", "H2")),
        ("2 CH3 <=> C2H6", ("CH3", "CH3"), ("C2H6",)),
        ("A<=>B", ("A",), ("B",)),
        ("H3O+ + OH- <=> 2 H2O", ("H3O+", "OH-"), ("H2O", "H2O")),
        ("1-C3H7 <=> C2H4 + CH3", ("1-C3H7",), ("C2H4", "CH3")),
    ],
)
def test_equations_are_taken_apart(text: str, reactants: tuple[str, ...], products: tuple[str, ...]) -> None:
    equation = parse_equation(text)
    assert (equation.reactants, equation.products) == (reactants, products)


@pytest.mark.parametrize(
    ("text", "message", "advice"),
    [
        ("A + B = C", "the arrow is '<=>', not '='", "Write 'A + B <=> C'; both directions are always computed."),
        ("A -> C", "the arrow is '<=>', not '->'", "Write 'A <=> C'; both directions are always computed."),
        ("A => C", "the arrow is '<=>', not '=>'", "Write 'A <=> C'; both directions are always computed."),
        ("A → C", "the arrow is '<=>', not '→'", "Write 'A <=> C'; both directions are always computed."),
        ("A + B", "there is no '<=>' in 'A + B'", "Write an equation such as 'CH4 + H <=> CH3 + H2'; both"),
        ("A <=> B <=> C", "'<=>' stands 2 times in 'A <=> B <=> C'", "Write one reaction an equation."),
        ("A + B + C <=> D", "there are more than 2 reactants", "Only reactions of one or two molecules"),
        ("3 A <=> D", "there are more than 2 reactants", "Only reactions of one or two molecules"),
        ("A <=> 5 B", "there are more than 4 products", "At most 4 are supported"),
        ("A + <=> B", "a name is missing in 'A +'", "Write names joined by ' + ' on both sides of the arrow."),
        ("A +B <=> C", "'A +B' is not a name", "A plus sign between species needs a blank on both sides."),
        (" <=> B", "there are no reactants", "Write names joined by ' + '"),
        ("0 A <=> B", "0 is not a number of molecules", "Write 1 or 2 molecules, e.g. '2 CH3'."),
        ("99999999999 A <=> B", "99999999999 is not a number of molecules", "Write 1 or 2"),
    ],
)
def test_a_wrong_equation_is_explained(text: str, message: str, advice: str) -> None:
    with pytest.raises(Fault) as caught:
        parse_equation(text)
    assert caught.value.message == message
    assert caught.value.advice.startswith(advice)


@given(st.lists(NAMES, min_size=1, max_size=MAX_REACTANTS), st.lists(NAMES, min_size=1, max_size=MAX_PRODUCTS))
def test_written_equations_come_back(reactants: list[str], products: list[str]) -> None:
    equation = parse_equation(f"{' + '.join(reactants)} <=> {' + '.join(products)}")
    assert (list(equation.reactants), list(equation.products)) == (reactants, products)
