"""Equal records give equal bytes; other bytes give a clear refusal."""

import contextlib
import struct
from dataclasses import dataclass

import msgspec
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rateloom.arrays import FloatArray
from rateloom.engine import decode, digest_of, encode


@dataclass(frozen=True, slots=True)
class Record:
    name: str
    numbers: dict[str, float]
    array: FloatArray
    maybe: FloatArray | None = None


plain = st.recursive(
    st.none()
    | st.booleans()
    | st.integers(-(2**60), 2**60)
    | st.floats()
    | st.text(max_size=5)
    | st.binary(max_size=5),
    lambda inner: st.lists(inner, max_size=4) | st.dictionaries(st.text(max_size=4), inner, max_size=4),
    max_leaves=6,
)


def reordered(value: object) -> object:
    """Reverse the order of every dictionary and give zero its other sign."""
    if isinstance(value, dict):
        return {key: reordered(value[key]) for key in reversed(value)}
    if isinstance(value, list):
        return [reordered(item) for item in value]
    return -value if isinstance(value, float) and value == 0 else value


@settings(max_examples=50)
@given(plain)
def test_order_of_keys_and_sign_of_zero_leave_no_trace(value: object) -> None:
    assert encode(reordered(value)) == encode(value)


@settings(max_examples=50)
@given(plain)
def test_bytes_are_the_same_after_a_round_trip(value: object) -> None:
    data = encode(value)

    assert encode(msgspec.msgpack.decode(data)) == data


@given(st.lists(st.floats(), min_size=6, max_size=6))
def test_layout_byte_order_and_nan_bits_of_an_array_leave_no_trace(numbers: list[float]) -> None:
    array = np.array(numbers).reshape(2, 3)
    other_nan = struct.unpack("<d", struct.pack("<Q", 0xFFF8000000000001))[0]
    others = (
        np.asfortranarray(array),
        array.astype(">f8"),
        np.repeat(array, 2, axis=1)[:, ::2],
        np.where(array == 0, -array, array),
        np.where(np.isnan(array), other_nan, array),
    )

    assert {encode(other) for other in others} == {encode(array)}


def test_nan_of_another_machine_gives_the_same_bytes() -> None:
    other_nan = struct.unpack("<d", struct.pack("<Q", 0xFFF8000000000000))[0]

    assert encode({"a": [other_nan]}) == encode({"a": [float("nan")]})


def test_encoding_leaves_the_array_as_it_was() -> None:
    array = np.array([-0.0])

    encode(array)

    assert np.signbit(array[0])


@pytest.mark.parametrize("shape", [(), (0,), (3,), (2, 0), (2, 3, 4)])
def test_records_come_back_with_the_shape_of_their_arrays(shape: tuple[int, ...]) -> None:
    record = Record("x", {"b": 1.5, "a": 2.5}, np.full(shape, 1.25), None)

    back = decode(encode(record), Record)

    assert back.array.shape == shape
    assert back.array.tobytes() == record.array.tobytes()
    assert (back.name, back.numbers, back.maybe) == ("x", {"a": 2.5, "b": 1.5}, None)


def test_a_different_shape_is_a_different_record() -> None:
    assert encode(np.zeros((2, 3))) != encode(np.zeros((3, 2)))


@pytest.mark.parametrize(
    "value", [object(), lambda: None, np.array(["a"]), np.array([object()]), np.array([1j]), np.longdouble([1])]
)
def test_what_has_no_canonical_form_is_refused(value: object) -> None:
    with pytest.raises(NotImplementedError, match="a record cannot hold a"):
        encode(value)


@pytest.mark.parametrize(
    "value", [{}, {"name": 1}, {"name": "x", "numbers": {}, "array": [[2], b"12345678"]}, [1], "text", None]
)
def test_bytes_of_something_else_raise_a_decode_error(value: object) -> None:
    with pytest.raises(msgspec.DecodeError):
        decode(msgspec.msgpack.encode(value), Record)


@given(st.binary(max_size=60))
def test_any_bytes_give_a_record_or_a_decode_error(data: bytes) -> None:
    with contextlib.suppress(msgspec.DecodeError):
        assert isinstance(decode(data, Record), Record)


@given(st.lists(st.binary(max_size=4), max_size=4), st.lists(st.binary(max_size=4), max_size=4))
def test_digests_tell_lists_of_parts_apart(one: list[bytes], two: list[bytes]) -> None:
    assert (digest_of(*one) == digest_of(*two)) == (one == two)
