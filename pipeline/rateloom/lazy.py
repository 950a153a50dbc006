"""Names of a room that are loaded when they are first asked for, so that a command loads only what it uses."""

from collections.abc import Callable, Mapping
from importlib import import_module
from typing import Any


def loader(room: str, modules: Mapping[str, tuple[str, ...]]) -> Callable[[str], Any]:
    """Make the ``__getattr__`` of a room (PEP 562).

    Parameters
    ----------
    room
        Its full name.
    modules
        The names that each module of the room gives.
    """
    where = {name: module for module, names in modules.items() for name in names}

    def load(name: str) -> Any:
        if name not in where:
            msg = f"module {room!r} has no attribute {name!r}"
            raise AttributeError(msg)
        return getattr(import_module(f"{room}.{where[name]}"), name)

    return load
