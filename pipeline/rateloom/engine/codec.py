"""Canonical bytes of records: what the store holds and what keys are made of.

Equal records give equal bytes on any machine: MessagePack with sorted keys, arrays as shape and little-endian
doubles in C order, no negative zero, one NaN. Reading is typed, so bytes from a file can make nothing but the record
asked for.
"""

import hashlib
import math
import re
import struct
from functools import cache
from typing import Any

import msgspec

_ODD_FLOAT = re.compile(rb"\xcb(?:\x80\x00|\xff\xf8)\x00{6}")
"""A negative zero and the NaN of x86 arithmetic in MessagePack; met elsewhere by chance, they cost a little time."""


def _encode_array(value: Any) -> Any:
    """Turn an array into its shape and bytes."""
    import numpy as np

    if isinstance(value, np.generic):
        return value.item()
    if not isinstance(value, np.ndarray) or value.dtype.kind not in "fiub" or value.dtype.itemsize > 8:
        msg = f"a record cannot hold a {type(value).__name__} {getattr(value, 'dtype', '')}".rstrip()
        raise NotImplementedError(msg)
    canonical = np.array(value, dtype="<f8", order="C")
    canonical += 0.0  # turns -0.0, which equals 0.0, into it
    canonical[np.isnan(canonical)] = np.nan  # the sign and payload of a NaN differ between machines
    return value.shape, canonical.tobytes()


def _decode_array(kind: Any, value: Any) -> Any:
    """Make an array from its shape and bytes; what is not such a pair raises ValueError or TypeError."""
    import numpy as np

    if getattr(kind, "__origin__", kind) is not np.ndarray:
        msg = f"a record cannot hold a {kind}"
        raise NotImplementedError(msg)
    shape, data = value
    return np.frombuffer(data, dtype="<f8").reshape(shape)


_ENCODER = msgspec.msgpack.Encoder(enc_hook=_encode_array, order="deterministic")


@cache
def _decoder(kind: Any) -> msgspec.msgpack.Decoder[Any]:
    return msgspec.msgpack.Decoder(kind, dec_hook=_decode_array)


def _without_odd_floats(value: Any) -> Any:
    """Copy plain values with every negative zero made positive and every NaN the same."""
    if isinstance(value, float):
        return math.nan if math.isnan(value) else value + 0.0
    if isinstance(value, dict):
        return {_without_odd_floats(key): _without_odd_floats(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return type(value)(_without_odd_floats(item) for item in value)
    return value


def encode(record: Any) -> bytes:
    """Encode a record of dataclasses, tuples, numbers, text and arrays.

    Raises
    ------
    NotImplementedError
        The record holds something else.
    """
    data = _ENCODER.encode(record)
    if _ODD_FLOAT.search(data):
        data = _ENCODER.encode(_without_odd_floats(msgspec.msgpack.decode(data)))
    return data


def decode(data: bytes, kind: Any) -> Any:
    """Decode bytes into a record of the type ``kind``.

    Raises
    ------
    msgspec.DecodeError
        The bytes are not such a record.
    """
    return _decoder(kind).decode(data)


def digest_of(*parts: bytes) -> bytes:
    """Hash parts so that no two different lists of parts look alike."""
    lengths = struct.pack(f"<{len(parts) + 1}Q", len(parts), *map(len, parts))
    return hashlib.blake2b(lengths + b"".join(parts), digest_size=20).digest()
