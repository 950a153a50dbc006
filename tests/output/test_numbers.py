"""Numbers and rows of the tables."""

import csv
import io

from hypothesis import given
from hypothesis import strategies as st

from rateloom.output.numbers import rows_text, text_of


def test_numbers_have_ten_significant_digits() -> None:
    assert text_of(1.0 / 3.0) == "0.3333333333"
    assert text_of(6.02214076e23) == "6.02214076e+23"


def test_minus_zero_is_zero() -> None:
    assert text_of(-0.0) == "0"


@given(st.floats(-1e300, 1e300, allow_subnormal=False))
def test_ten_digits_come_back_to_a_part_in_a_thousand_million(number: float) -> None:
    assert abs(float(text_of(number)) - number) <= 5e-10 * abs(number)


@given(st.lists(st.text(st.characters(exclude_categories=["Cs"], exclude_characters="\0")), min_size=2))
def test_any_text_survives_the_table(cells: list[str]) -> None:
    """RFC 4180, sections 2.5 to 2.7: quotes around commas, quotes and line breaks, quotes doubled."""
    text = rows_text([cells])

    assert text.endswith("\r\n")  # RFC 4180, section 2.1
    assert next(csv.reader(io.StringIO(text, newline=""))) == cells
