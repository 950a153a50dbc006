"""Compressed data, told by their first bytes, unpacked a bounded amount: a small file may unpack to any size."""

import bz2
import lzma
import sys
import zlib
from collections.abc import Callable
from functools import partial
from typing import Protocol

from rateloom.errors import CalculationError, TooLargeError


class Unpacker(Protocol):
    """Unpacks one of the streams that follow one another in a file."""

    def decompress(self, data: bytes, max_length: int, /) -> bytes:
        """Give at most so many bytes of what is packed in the data."""

    @property
    def eof(self) -> bool:
        """Whether the stream has come to its end."""

    @property
    def unused_data(self) -> bytes:
        """What follows the stream."""


GZIP_WITH_HEADER = 31
LOOKS_BACK = 200_000_000
"""Memory that xz may ask for [bytes]; its strongest setting takes a third of that, a forged header asks for 4 GB."""
COMPRESSIONS: tuple[tuple[bytes, str, Callable[[], Unpacker]], ...] = (
    (b"\x1f\x8b", "gzip", partial(zlib.decompressobj, GZIP_WITH_HEADER)),
    (b"BZh", "bzip2", bz2.BZ2Decompressor),
    (b"\xfd7zXZ\x00", "xz", partial(lzma.LZMADecompressor, memlimit=LOOKS_BACK)),
)
BROKEN = (OSError, EOFError, ValueError, zlib.error, lzma.LZMAError)
MOST_LAYERS = 3
"""Data may unpack to themselves."""


def decompress(name: str, data: bytes, largest: int | None = None) -> bytes:
    """Undo the compression of a file, layer by layer.

    Parameters
    ----------
    name
        Of the file, for messages.
    data
        Its bytes.
    largest
        How many bytes each layer may unpack to; None sets no limit.

    Returns
    -------
    bytes
        What was packed; the data themselves where they are not compressed.

    Raises
    ------
    CalculationError
        The compressed data are damaged.
    TooLargeError
        They unpack to more than ``largest`` bytes.
    """
    for layer in range(MOST_LAYERS + 1):
        known = [(label, make) for magic, label, make in COMPRESSIONS if data.startswith(magic)]
        if not known:
            break
        label, make = known[0]
        if layer == MOST_LAYERS:
            msg = f"{name}: the file is compressed more than {MOST_LAYERS} times over. Unpack it."
            raise CalculationError(msg)
        try:
            unpacked = unpack(data, make, sys.maxsize - 1 if largest is None else largest)
        except BROKEN as error:
            msg = f"{name}: the {label} data are damaged or cut short ({error}). Copy or compress the file again."
            raise CalculationError(msg) from error
        if unpacked is None:
            msg = (
                f"{name}: the {label} data unpack to more than {(largest or 0) / 1e6:g} MB. "
                "If they are an output all the same, allow more with --largest-file."
            )
            raise TooLargeError(msg)
        data = unpacked
    return data


def unpack(data: bytes, make: Callable[[], Unpacker], largest: int) -> bytes | None:
    """Unpack all streams of a file; None where that gives more than ``largest`` bytes.

    Raises
    ------
    EOFError
        The data end inside a stream.
    """
    parts: list[bytes] = []
    total = 0
    while data:
        unpacker = make()
        # One byte more tells what is too large from what just fits.
        parts.append(unpacker.decompress(data, largest - total + 1))
        total += len(parts[-1])
        if total > largest:
            return None
        if not unpacker.eof:
            msg = "the data end before their end mark"
            raise EOFError(msg)
        data = unpacker.unused_data.lstrip(b"\x00")  # tapes and some copies pad with zeros
    return b"".join(parts)
