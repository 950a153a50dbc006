"""Writing the output folder: each file beside its name, then renamed into place, so that none is ever half a file."""

import contextlib
import os
from collections.abc import Mapping
from pathlib import Path

from rateloom.errors import OutputError


def write_files(folder: Path, contents: Mapping[str, bytes]) -> None:
    """Write files into a folder: first all of them beside their names, then all renamed.

    Parameters
    ----------
    folder
        Exists already, held by this run alone: what a killed one left beside the names is removed.
    contents
        By file name; renamed in this order. A file that holds the same bytes already is left alone.

    Raises
    ------
    OutputError
        One cannot be written; those that stood there are untouched then.
    """
    changed = {name: data for name, data in contents.items() if read_file(folder, name) != data}
    beside = {name: folder / f".{name}.{os.getpid()}.part" for name in changed}
    try:
        for left in folder.glob(".*.part"):
            left.unlink()
        for name, data in changed.items():
            with beside[name].open("wb") as file:
                file.write(data)
                file.flush()
                os.fsync(file.fileno())
        for name, path in beside.items():
            path.replace(folder / name)
    except OSError as error:
        msg = (
            f"{folder} cannot be written: {error.strerror or error}. The tables that stood there are as they were. "
            "Free some space or mend the folder, then run again: what was computed is kept."
        )
        raise OutputError(msg) from error
    finally:
        for path in beside.values():
            with contextlib.suppress(OSError):
                path.unlink(missing_ok=True)


def read_file(folder: Path, name: str) -> bytes | None:
    """Read a file that may stand in an output folder; None where there is none."""
    try:
        return (folder / name).read_bytes()
    except OSError:
        return None
