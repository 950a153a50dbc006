"""What a new table of rate coefficients changes against the one that stood there."""

import csv
from collections.abc import Iterable

from rateloom.output.numbers import Cell, rows_text

HEADER = ("reaction", "direction", "temperature_K", "before", "after", "ratio")

Key = tuple[str, str, str]
Value = tuple[str, str]


def changes_table(before: bytes | None, after: bytes) -> bytes:
    """Compare two texts of ``rates.csv``.

    Parameters
    ----------
    before
        None where none stood there: then nothing has changed.
    after
        The new one.

    Returns
    -------
    bytes
        CSV: a row for each rate coefficient that differs, came or went, in the order of the new table and then of the
        old one; what is missing on one side is empty, and so is a ratio across a change of unit.
    """
    rows: list[tuple[Cell, ...]] = [HEADER]
    if before is not None and before != after:
        old_lines, new_lines = _lines(before), _lines(after)
        old = _coefficients(line for line in old_lines if line not in new_lines)
        new = _coefficients(line for line in new_lines if line not in old_lines)
        for key in dict.fromkeys([*new, *old]):
            rows += _row(key, old.get(key), new.get(key))
    return rows_text(rows).encode()


def _lines(table: bytes) -> dict[str, None]:
    """Give the lines of a table without its header, in order, quick to look up."""
    return dict.fromkeys(table.decode("utf-8", "replace").splitlines()[1:])


def _coefficients(lines: Iterable[str]) -> dict[Key, Value]:
    """Read reaction, direction and temperature with the coefficient and its unit."""
    return {(row[0], row[1], row[2]): (row[3], row[4]) for row in csv.reader(lines) if len(row) >= 5}


def _row(key: Key, old: Value | None, new: Value | None) -> list[tuple[Cell, ...]]:
    """Make the row of one coefficient; none where only another column differs."""
    if old == new:
        return []
    ratio: Cell = ""
    if old is not None and new is not None and old[1] == new[1] and float(old[0]) != 0.0:
        ratio = float(new[0]) / float(old[0])
    return [(*key, old[0] if old else "", new[0] if new else "", ratio)]
