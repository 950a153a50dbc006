"""Types of single fields of a job file: text in, value in the unit of the records out, with our own messages."""

import re
from collections.abc import Callable
from typing import Annotated, Any, TypeAlias

from pydantic import BeforeValidator, WithJsonSchema

from rateloom.job.problems import refuse, suggestion
from rateloom.job.units import (
    ENERGY,
    FREQUENCY,
    LENGTH,
    LEVEL,
    PRESSURE,
    RATIO,
    TEMPERATURE,
    Kind,
    plain_number,
    quantity,
)

_COUNT = re.compile(r"0|[1-9]\d{0,11}", re.ASCII)  # 010 is 8 to some readers of YAML, 10 to others
_WHOLE_NUMBER = re.compile(rf"[+-]?(?:{_COUNT.pattern})", re.ASCII)
Validator: TypeAlias = Callable[[Any], Any]


def literal(value: Any, wanted: str = "a text") -> str:
    """Take a scalar for the text that it is."""
    if not isinstance(value, str):
        found = "a block" if isinstance(value, dict) else "a list" if isinstance(value, list) else "nothing"
        refuse(f"{wanted} is wanted here, not {found}", f"Write {wanted}.")
    return value


def _number(kind: Kind | None, low: float, high: float, bounds: str) -> Validator:
    def validate(value: Any) -> float:
        text = literal(value, kind.name if kind else "a number")
        number = quantity(text, kind) if kind else plain_number(text)
        if not low <= number <= high:
            refuse(f"{text!r} is out of range", f"{bounds}.")
        return number

    return validate


def _whole(low: int, high: int) -> Validator:
    def validate(value: Any) -> int:
        text = literal(value, "a whole number").strip()
        if not (_WHOLE_NUMBER if low < 0 else _COUNT).fullmatch(text):
            refuse(f"{text[:40]!r} is no whole number", f"Write a whole number from {low} to {high}.")
        if not low <= int(text) <= high:
            refuse(f"{int(text)} is out of range", f"Write a whole number from {low} to {high}.")
        return int(text)

    return validate


def _choice(*known: str) -> Validator:
    def validate(value: Any) -> str:
        text = " ".join(literal(value, f"one of {', '.join(known)}").split())
        if text not in known:
            refuse(f"{text!r} is not known", suggestion(text, known) or f"Known: {', '.join(known)}.")
        return text

    return validate


def _line(value: Any) -> str:
    text = " ".join(literal(value).split())
    if not text:
        refuse("the text is empty", "Write a text or remove the key.")
    if not text.isprintable():
        refuse(f"{text[:40]!r} holds characters that cannot be printed", "Remove them.")
    return text


def _one_or_list(value: Any) -> Any:
    return value if isinstance(value, list) else [literal(value, "a name or a list of names")]


def _quantity_schema(kind: Kind) -> WithJsonSchema:
    description = f"{kind.name}, e.g. '{kind.example}'; unit of a bare number: {kind.default}"
    return WithJsonSchema({"type": ["number", "string"], "description": description})


def _whole_schema(low: int, high: int) -> WithJsonSchema:
    return WithJsonSchema({"type": "integer", "minimum": low, "maximum": high})


RATE_UNITS = ("cm3 molecule-1 s-1", "cm3 mol-1 s-1", "m3 mol-1 s-1", "L mol-1 s-1")
"""Units of bimolecular rate coefficients; first-order ones are in s-1."""
_TUNNELLING = ("none", "wigner", "eckart")
_SPACINGS = ("linear", "reciprocal", "log")
_FORMS = ("modified-arrhenius",)
_SEVERITIES = ("error", "warning", "note")
_ANY = 1e300

Text = Annotated[str, BeforeValidator(_line)]
Names = Annotated[list[Text], BeforeValidator(_one_or_list), WithJsonSchema({"type": ["string", "array"]})]
RateUnit = Annotated[str, BeforeValidator(_choice(*RATE_UNITS)), WithJsonSchema({"enum": list(RATE_UNITS)})]
Tunnelling = Annotated[str, BeforeValidator(_choice(*_TUNNELLING)), WithJsonSchema({"enum": list(_TUNNELLING)})]
Spacing = Annotated[str, BeforeValidator(_choice(*_SPACINGS)), WithJsonSchema({"enum": list(_SPACINGS)})]
FitForm = Annotated[str, BeforeValidator(_choice(*_FORMS)), WithJsonSchema({"enum": list(_FORMS)})]
Severity = Annotated[str, BeforeValidator(_choice(*_SEVERITIES)), WithJsonSchema({"enum": list(_SEVERITIES)})]

Temperature = Annotated[
    float,
    BeforeValidator(_number(TEMPERATURE, 1.0, 2e4, "Temperatures lie between 1 K and 20000 K")),
    _quantity_schema(TEMPERATURE),
]
ReferenceTemperature = Annotated[
    float,
    BeforeValidator(_number(TEMPERATURE, 1e-3, 2e4, "It lies above 0 K, usually at 1 K, 298.15 K or 1000 K")),
    _quantity_schema(TEMPERATURE),
]
Pressure = Annotated[
    float,
    BeforeValidator(_number(PRESSURE, 1e-6, 1e12, "A standard pressure is above zero, usually 1 bar")),
    _quantity_schema(PRESSURE),
]
Tolerance = Annotated[
    float,
    BeforeValidator(_number(RATIO, 1e-12, 1.0, "It lies above 0 and up to 100 %; write '5 %' or 0.05")),
    _quantity_schema(RATIO),
]
Energy = Annotated[
    float,
    BeforeValidator(_number(ENERGY, -1e7, 1e7, "An electronic energy lies within 1e7 hartree of zero")),
    _quantity_schema(ENERGY),
]
LevelEnergy = Annotated[
    float,
    BeforeValidator(_number(LEVEL, 0.0, 1e-16, "A level lies above or at the lowest one, by less than 600 eV")),
    _quantity_schema(LEVEL),
]
Frequency = Annotated[
    float,
    BeforeValidator(_number(FREQUENCY, -2e4, 2e4, "A frequency lies within 20000 cm-1, imaginary ones negative")),
    _quantity_schema(FREQUENCY),
]
Length = Annotated[
    float,
    BeforeValidator(_number(LENGTH, -1e5, 1e5, "A coordinate lies within 100000 angstrom")),
    _quantity_schema(LENGTH),
]
ScaleFactor = Annotated[
    float,
    BeforeValidator(_number(None, 0.5, 1.5, "A scale factor lies between 0.5 and 1.5")),
    WithJsonSchema({"type": "number", "minimum": 0.5, "maximum": 1.5}),
]
PathDegeneracy = Annotated[
    float,
    BeforeValidator(_number(None, 1e-6, 1e6, "A path degeneracy is above zero")),
    WithJsonSchema({"type": "number", "exclusiveMinimum": 0}),
]
Threshold = Annotated[
    float,
    BeforeValidator(_number(None, -_ANY, _ANY, "Write a finite number")),
    WithJsonSchema({"type": "number"}),
]
Charge = Annotated[int, BeforeValidator(_whole(-20, 20)), _whole_schema(-20, 20)]
Multiplicity = Annotated[int, BeforeValidator(_whole(1, 50)), _whole_schema(1, 50)]
SymmetryNumber = Annotated[int, BeforeValidator(_whole(1, 200)), _whole_schema(1, 200)]
OpticalIsomers = Annotated[int, BeforeValidator(_whole(1, 64)), _whole_schema(1, 64)]
Degeneracy = Annotated[int, BeforeValidator(_whole(1, 1000)), _whole_schema(1, 1000)]
AtomNumber = Annotated[int, BeforeValidator(_whole(1, 100_000)), _whole_schema(1, 100_000)]
GridCount = Annotated[int, BeforeValidator(_whole(3, 10_000)), _whole_schema(3, 10_000)]
