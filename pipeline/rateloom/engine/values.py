"""Values of finished nodes, loaded from the store for the tasks that take them."""

from collections import OrderedDict

from rateloom.engine.codec import digest_of, encode
from rateloom.engine.store import Store

NOTHING = encode(None)
NO_VALUE = digest_of(NOTHING)
"""Digest of a result that has nothing to go on with."""
CACHED_BYTES = 64_000_000


class DamagedResultError(Exception):
    """A stored value is missing or does not have its digest."""


class Values:
    """Recently used values, by digest.

    Parameters
    ----------
    store
        Where the others come from.
    """

    def __init__(self, store: Store) -> None:
        self._store = store
        self._cached: OrderedDict[bytes, bytes] = OrderedDict()
        self._bytes = 0

    def load(self, key: bytes, digest: bytes) -> bytes:
        """Give the value of a result.

        Raises
        ------
        DamagedResultError
            The store does not hold it any more.
        """
        if digest == NO_VALUE:
            return NOTHING
        if digest not in self._cached:
            value = self._store.value(key)
            if value is None:
                raise DamagedResultError(key)
            self._keep(digest, value)
        self._cached.move_to_end(digest)
        return self._cached[digest]

    def _keep(self, digest: bytes, value: bytes) -> None:
        self._cached[digest] = value
        self._bytes += len(value)
        while self._bytes > CACHED_BYTES and len(self._cached) > 1:
            self._bytes -= len(self._cached.popitem(last=False)[1])
