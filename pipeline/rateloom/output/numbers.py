"""Numbers and rows as they stand in every table: ten significant digits, RFC 4180."""

import csv
import io
from collections.abc import Iterable, Sequence

Cell = str | float | int


def text_of(number: float) -> str:
    """Write a number with 10 significant digits; minus zero is zero."""
    return f"{number + 0.0:.10g}"


def rows_text(rows: Iterable[Sequence[Cell]]) -> str:
    """Write rows of CSV, floats with 10 significant digits."""
    buffer = io.StringIO(newline="")
    writer = csv.writer(buffer)
    writer.writerows([[text_of(cell) if isinstance(cell, float) else cell for cell in row] for row in rows])
    return buffer.getvalue()
