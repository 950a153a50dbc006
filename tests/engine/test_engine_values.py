"""Values come from the store, once, and never damaged."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from rateloom.engine import Store, digest_of, open_store
from rateloom.engine import values as values_module
from rateloom.engine.values import NO_VALUE, NOTHING, DamagedResultError, Values


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with open_store(tmp_path) as store:
        store.put([(b"%d" % i, b"%d" % i * 100, b"") for i in range(10)])
        yield store


def test_a_value_is_loaded_once(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    values = Values(store)
    digest = digest_of(b"1" * 100)
    assert values.load(b"1", digest) == b"1" * 100

    monkeypatch.setattr(Store, "value", lambda _self, _key: None)

    assert values.load(b"1", digest) == b"1" * 100
    with pytest.raises(DamagedResultError):
        values.load(b"2", digest_of(b"2" * 100))


def test_the_least_recently_used_make_room(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(values_module, "CACHED_BYTES", 250)
    values = Values(store)
    asked: list[bytes] = []
    original = Store.value
    monkeypatch.setattr(Store, "value", lambda self, key: asked.append(key) or original(self, key))

    for i in (0, 1, 0, 2, 0, 1):
        values.load(b"%d" % i, digest_of(b"%d" % i * 100))

    assert asked == [b"0", b"1", b"2", b"1"]


def test_nothing_needs_no_store(store: Store) -> None:
    assert Values(store).load(b"unknown", NO_VALUE) == NOTHING
