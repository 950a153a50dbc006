"""Names of species, transition states and reactions, and the equations made of them."""

import re
from dataclasses import dataclass
from typing import NoReturn

from rateloom.job.problems import refuse

PATTERN = r"[A-Za-z0-9(][A-Za-z0-9_.,()\[\]*'+-]{0,63}"
"""What a name looks like; it must not end with a full stop."""
ARROW = "<=>"
MAX_REACTANTS = 2
MAX_PRODUCTS = 4
_NAME = re.compile(PATTERN)
_PLUS = re.compile(r"\s\+\s")
_COUNTED = re.compile(r"(\d+)\s+(\S.*)")
_OTHER_ARROWS = ("<=>", "<->", "<-->", "-->", "->", "==>", "=>", "⇌", "⇄", "↔", "→", "=")
_RULE = (
    "Names hold letters, digits and _.,()[]*'+- , begin with a letter, a digit or '(' and have at most 64 characters."
)


@dataclass(frozen=True, slots=True)
class Equation:
    """Both sides, one name per molecule."""

    text: str
    reactants: tuple[str, ...]
    products: tuple[str, ...]


def name_fault(name: str) -> tuple[str, str] | None:
    """Say what is wrong with a name and what to do; None if it is well formed."""
    if _NAME.fullmatch(name) and not name.endswith("."):
        return None
    shown = name if len(name) <= 70 else f"{name[:67]}..."
    return f"{shown!r} is not a name", _RULE if not name.endswith(".") else "Names do not end with a full stop."


def parse_equation(text: str) -> Equation:
    """Take an equation such as ``CH4 + H <=> CH3 + H2`` apart.

    Raises
    ------
    Fault
        The arrow, a plus sign or the number of molecules is wrong.
    """
    text = " ".join(text.split())
    sides = text.split(ARROW)
    if len(sides) != 2:
        _refuse_arrow(text, len(sides) - 1)
    reactants = _side(sides[0], "reactants", MAX_REACTANTS)
    products = _side(sides[1], "products", MAX_PRODUCTS)
    return Equation(text, reactants, products)


def _refuse_arrow(text: str, arrows: int) -> NoReturn:
    if arrows > 1:
        refuse(f"{ARROW!r} stands {arrows} times in {text!r}", "Write one reaction an equation.")
    advice = f"Write an equation such as 'CH4 + H {ARROW} CH3 + H2'; both directions are always computed."
    for other in _OTHER_ARROWS:
        left, found, right = text.partition(other)
        if found:
            advice = f"Write '{left.strip()} {ARROW} {right.strip()}'; both directions are always computed."
            refuse(f"the arrow is {ARROW!r}, not {other!r}", advice)
    refuse(f"there is no {ARROW!r} in {text!r}", advice)


def _side(side: str, what: str, most: int) -> tuple[str, ...]:
    names: list[str] = []
    for term in _PLUS.split(side):
        count, name = _term(term.strip(), side.strip(), what)
        if len(names) + count > most:
            advice = f"At most {most} are supported; write elementary reactions."
            if what == "reactants":
                advice = "Only reactions of one or two molecules have a transition state theory here; split this one."
            refuse(f"there are more than {most} {what}", advice)
        names.extend([name] * count)
    return tuple(names)


def _term(term: str, side: str, what: str) -> tuple[int, str]:
    if not term:
        message = f"a name is missing in {side!r}" if side else f"there are no {what}"
        refuse(message, "Write names joined by ' + ' on both sides of the arrow.")
    counted = _COUNTED.fullmatch(term)
    count, name = (counted[1], counted[2]) if counted else ("1", term)
    if fault := name_fault(name):
        advice = fault[1]
        if "+" in name and " " in name:
            advice = "A plus sign between species needs a blank on both sides."
        refuse(fault[0], advice)
    if len(count) > 3 or int(count) == 0:
        refuse(f"{count} is not a number of molecules", "Write 1 or 2 molecules, e.g. '2 CH3'.")
    return int(count), name
