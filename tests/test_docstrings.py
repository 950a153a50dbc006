"""Docstrings of the physics say what a chemist needs: shapes, units and sources.

The rule holds for every public function defined in a module of ``molecule``, ``statmech``, ``rates`` and ``fits``
that takes or gives arrays or floats: each such parameter and result has its unit in brackets, ``[1]`` where it has
none, or in words (geometry is often in any one unit), and each array its shape; a docstring without sections says so
in its sentence. Whatever is in SI units names its source. What is raised is written down by all.
"""

import ast
import importlib
import inspect
import pkgutil
import re
from collections.abc import Callable, Iterator
from types import ModuleType

import pytest

import rateloom.fits
import rateloom.molecule
import rateloom.rates
import rateloom.statmech

ROOMS = (rateloom.molecule, rateloom.statmech, rateloom.rates, rateloom.fits)
UNIT = re.compile(r"\[[^\[\]]+\]|\bunit\b|\bangstrom\b")
SI = re.compile(r"\[(kg|m|Hz|J|K|ln m-3)\b")
QUANTITY = re.compile(r"\bfloat(64)?\b")
ARRAY = re.compile(r"\bfloat64\b")
# a publication, a library, or why there is none
SOURCE = re.compile(r"\b(1[89]|20)\d\d\b|names its source|library|No physics")


def modules(room: ModuleType) -> Iterator[ModuleType]:
    for found in pkgutil.walk_packages(room.__path__, f"{room.__name__}."):
        yield importlib.import_module(found.name)


def public_functions() -> list[Callable]:
    """Functions of the physics, each once, in the order of their names."""
    found = {}
    for room in ROOMS:
        for module in modules(room):
            for name, value in vars(module).items():
                if inspect.isfunction(value) and value.__module__ == module.__name__ and not name.startswith("_"):
                    found[f"{module.__name__}.{name}"] = value
    return [found[name] for name in sorted(found)]


def has_numbers(function: Callable) -> bool:
    signature = inspect.signature(function)
    kinds = [signature.return_annotation, *(p.annotation for p in signature.parameters.values())]
    return any(QUANTITY.search(str(kind)) for kind in kinds)


def needs_source(function: Callable) -> bool:
    return has_numbers(function) and bool(SI.search(function.__doc__ or ""))


def named(functions: list[Callable]) -> list:
    return [pytest.param(f, id=f"{f.__module__.removeprefix('rateloom.')}.{f.__name__}") for f in functions]


FUNCTIONS = public_functions()
NUMERICAL = [function for function in FUNCTIONS if has_numbers(function)]


def sections(function: Callable) -> dict[str, str]:
    """Text of a numpy docstring by the heading above it; the summary under an empty one."""
    lines, parts, heading = inspect.getdoc(function).splitlines(), {"": []}, ""
    for line, below in zip(lines, [*lines[1:], ""], strict=True):
        if line and set(below) == {"-"} and len(below) == len(line):
            heading = line
            parts[heading] = []
        elif set(line) != {"-"}:
            parts[heading].append(line)
    return {heading: "\n".join(text) for heading, text in parts.items()}


def items(text: str) -> dict[str, str]:
    """Entry of a section by each of its names: the head line and what is indented below."""
    found = {}
    for block in re.split(r"\n(?=\S)", text.strip()):
        for name in block.partition("\n")[0].partition(" : ")[0].split(", "):
            found[name.strip().lstrip("*")] = block
    return found


def raised(function: Callable) -> set[str]:
    """Names of the exceptions that the body itself raises."""
    tree = ast.parse(inspect.cleandoc("\n" + inspect.getsource(function)))
    calls = [node.exc for node in ast.walk(tree) if isinstance(node, ast.Raise) and node.exc is not None]
    return {call.func.id for call in calls if isinstance(call, ast.Call) and isinstance(call.func, ast.Name)}


@pytest.mark.parametrize("function", named(NUMERICAL))
def test_parameters_are_written_down_with_shape_and_unit(function: Callable) -> None:
    parameters = inspect.signature(function).parameters
    text = sections(function)
    entries = items(text["Parameters"]) if "Parameters" in text else dict.fromkeys(parameters, text[""])

    for name, parameter in parameters.items():
        if name.startswith("_"):
            continue
        assert name in entries, f"no entry for {name}"
        if QUANTITY.search(str(parameter.annotation)):
            assert UNIT.search(entries[name]), f"no unit of {name}"
        if ARRAY.search(str(parameter.annotation)):
            assert "shape" in entries[name], f"no shape of {name}"


@pytest.mark.parametrize("function", named(NUMERICAL))
def test_what_is_returned_has_shape_and_unit(function: Callable) -> None:
    annotation, parts = str(inspect.signature(function).return_annotation), sections(function)
    text = parts[""] if parts.keys() == {""} else parts.get("Returns", "")

    assert text.strip(), "no section Returns"
    if QUANTITY.search(annotation):
        assert UNIT.search(text), "no unit"
    if ARRAY.search(annotation):
        assert "shape" in text, "no shape"


@pytest.mark.parametrize("function", named(FUNCTIONS))
def test_what_is_raised_is_written_down(function: Callable) -> None:
    assert raised(function) <= items(sections(function).get("Raises", "")).keys()


@pytest.mark.parametrize("function", named([f for f in FUNCTIONS if needs_source(f)]))
def test_a_source_is_named(function: Callable) -> None:
    text = sections(function).get("References", "")

    assert SOURCE.search(text), text or "no section References"


def test_there_are_functions_to_read() -> None:
    assert len(NUMERICAL) > 40
