"""Unpacking a bounded amount, whatever the data claim."""

import bz2
import gzip
import lzma
import tracemalloc
from collections.abc import Callable

import pytest

from rateloom.calculation.compression import MOST_LAYERS, decompress
from rateloom.errors import CalculationError, TooLargeError

Compress = Callable[[bytes], bytes]
COMPRESSIONS = pytest.mark.parametrize(
    "compress", [gzip.compress, bz2.compress, lzma.compress], ids=["gzip", "bzip2", "xz"]
)
TEXT = b"".join(b"line %d\n" % number for number in range(5_000))


@COMPRESSIONS
def test_streams_that_follow_one_another_are_joined(compress: Compress) -> None:
    assert decompress("a", compress(TEXT) + compress(b"end")) == TEXT + b"end"


@COMPRESSIONS
def test_what_just_fits_is_unpacked_and_one_byte_more_is_refused(compress: Compress) -> None:
    packed = compress(TEXT) * 2

    assert decompress("a", packed, 2 * len(TEXT)) == TEXT * 2
    with pytest.raises(TooLargeError, match=r"a: the \w+ data unpack to more than .* MB.*--largest-file"):
        decompress("a", packed, 2 * len(TEXT) - 1)


@COMPRESSIONS
def test_memory_stays_near_the_limit_however_much_is_packed(compress: Compress) -> None:
    packed = compress(bytes(50_000_000))
    tracemalloc.start()
    try:
        with pytest.raises(TooLargeError):
            decompress("a", packed, 1_000_000)
        peak = tracemalloc.get_traced_memory()[1]
    finally:
        tracemalloc.stop()

    # What is unpacked, once more while it is joined, and the 8 MB that xz looks back.
    assert peak < 15_000_000


@COMPRESSIONS
@pytest.mark.parametrize(
    "damage",
    [lambda data: data[:-3], lambda data: data + b"more", lambda data: data[:30]],
    ids=["cut", "more at the end", "beginning alone"],
)
def test_damage_is_told(compress: Compress, damage: Compress) -> None:
    with pytest.raises(CalculationError, match="data are damaged or cut short"):
        decompress("a", damage(compress(TEXT)))


def test_padding_with_zeros_is_of_no_account() -> None:
    assert decompress("a", gzip.compress(TEXT) + bytes(512)) == TEXT


def test_data_packed_many_times_over_are_not_followed_for_ever() -> None:
    packed = TEXT
    for _ in range(MOST_LAYERS):
        packed = gzip.compress(packed)
    assert decompress("a", packed) == TEXT

    with pytest.raises(CalculationError, match="Unpack it"):
        decompress("a", gzip.compress(packed))
