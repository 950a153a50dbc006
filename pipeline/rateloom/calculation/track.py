"""cclib run over an output, line by line, with the place of everything it finds.

cclib merges all jobs of a file into one set of attributes. Which geometry, energy and frequencies belong together is
told by where they stand, so that each new value is noted with its lines as it appears.
"""

import contextlib
import importlib
import io
import logging
import warnings
from collections import deque
from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from functools import partial
from typing import Any

import numpy as np
from cclib.parser.logfileparser import StopParsing
from cclib.parser.logfilewrapper import FileWrapper

from rateloom.calculation.output import Output
from rateloom.calculation.programs.program import Program
from rateloom.calculation.sieve import Sieve
from rateloom.errors import CalculationError

GROWING = ("atomcoords", "inputcoords", "scfenergies", "mpenergies", "ccenergies")
"""Lists to which cclib adds one entry a time; every other attribute is replaced or filled."""
WHOLE = ("atomnos", "atommasses", "charge", "mult", "vibfreqs", "vibdisps", "rotconsts")
WATCHED = (*GROWING, *WHOLE)
SILENT = logging.CRITICAL + 10


@dataclass(slots=True)
class Entry:
    """A value and the lines, counted from 1, from which it was read."""

    begin: int
    end: int
    value: Any


@dataclass(slots=True)
class Track:
    """All values found in one output, by cclib's name of the attribute, in the order of the file."""

    entries: dict[str, list[Entry]] = field(default_factory=lambda: {name: [] for name in WATCHED})
    metadata: dict[str, Any] = field(default_factory=dict)
    cut: bool = False
    """The file ends inside a block that was being read."""

    def geometries(self) -> list[Entry]:
        """Give all geometries, in whatever frame, in the order of the file."""
        found = [*self.entries["atomcoords"], *self.entries["inputcoords"]]
        return sorted(found, key=lambda entry: entry.begin)

    def last(self, name: str, line: int) -> Any:
        """Give the last value of an attribute begun at or before a line, else the first after it, else None."""
        found = [entry.value for entry in self.entries[name] if entry.begin <= line]
        if found:
            return found[-1]
        return self.entries[name][0].value if self.entries[name] else None


class Watch:
    """Notes what is new in a reader's attributes since the line before."""

    def __init__(self, track: Track) -> None:
        self.track = track
        self.seen: dict[str, tuple[Any, int]] = {}
        self.newest = (0, "")

    def note(self, found: dict[str, Any], begin: int, end: int) -> None:
        """Compare with the line before; both lines counted from 1."""
        if self.nothing_new(found):
            return
        for name in WATCHED:
            value = found.get(name)
            if value is None:
                continue
            size = size_of(value)
            former, former_size = self.seen.get(name, (None, 0))
            if former is value and former_size == size:
                continue
            self.seen[name] = value, size
            entries = self.track.entries[name]
            if name in GROWING:
                # A list that was begun anew (cclib drops some between two jobs) holds only new entries.
                known = former_size if former is value and 0 <= former_size < size else 0
                entries.extend(Entry(begin, end, item) for item in value[known:])
            elif former is value:
                entries[-1].end = end
            else:
                entries.append(Entry(begin, end, value))

    def nothing_new(self, found: dict[str, Any]) -> bool:
        """Tell, as after most lines, that no attribute came (it would be the last of the dictionary) or changed."""
        newest = len(found), next(reversed(found))
        if newest != self.newest:
            self.newest = newest
            return False
        for name, (former, size) in self.seen.items():
            value = found.get(name)
            if value is not former or (size >= 0 and len(value) != size):
                return False
        return True


def size_of(value: object) -> int:
    """Give the number of entries of a value, -1 for one that has none."""
    return len(value) if hasattr(value, "__len__") else -1


class Lines(FileWrapper):
    """Numbered lines in the place of cclib's file; it looks back up to ten lines."""

    def __init__(self, lines: Iterable[tuple[int, str]]) -> None:
        self.rest: Iterator[tuple[int, str]] = iter(lines)
        self.number = 0
        self.ended = False
        self.last_lines = deque([""] * 10, 10)
        self.filenames = ["output"]
        self.files: list[Any] = []
        self.size = self.pos = 0

    def __next__(self) -> str:
        """Give the next line."""
        try:
            self.number, line = next(self.rest)
        except StopIteration:
            self.ended = True
            raise
        self.last_lines.append(line)
        return line

    def sort(self, order: list[str]) -> None:
        """Do nothing: there is one file."""

    def reset(self) -> None:
        """Do nothing: the lines are read once, from the first."""


def follow(output: Output, program: Program, lines: Iterable[tuple[int, str]], idle: Sieve | None = None) -> Track:
    """Run a program's reader over numbered lines of its output, those apart that a sieve calls idle.

    Raises
    ------
    CalculationError
        The reader stops before the end of the file.
    """
    module, name = program.reader.split(":")
    source = Lines(lines)
    track = Track()
    watch = Watch(track)
    # Some readers print what they do not understand; a message belongs in the record or nowhere.
    with warnings.catch_warnings(), np.errstate(all="ignore"), contextlib.redirect_stdout(io.StringIO()):
        warnings.simplefilter("ignore")
        parser: Any = getattr(importlib.import_module(module), name)(source, loglevel=SILENT)
        # What cclib's own loop sets for its progress bar, which some readers ask for.
        parser.fupdate = parser.cupdate = 0.0
        # Comparing every value with the former one, only to log a difference, takes half of the time.
        parser.set_attribute = partial(overwrite, parser)
        parser.before_parsing()
        track.metadata = parser.metadata
        for line in source:
            if idle and idle(line):
                continue
            begin = source.number
            try:
                parser.extract(source, line)
            except StopParsing:
                break
            except StopIteration:
                track.cut = True
                break
            except Exception as error:
                if source.number >= len(output.starts) or not next(source, ""):
                    track.cut = True
                    break
                raise stopped(output, program, begin, source.number - 1, line, error) from error
            finally:
                watch.note(parser.__dict__, begin, source.number)
    return track


def overwrite(parser: object, name: str, value: Any, check_change: bool = True) -> None:  # noqa: ARG001
    """Set an attribute of a reader in the place of cclib's own, which compares before."""
    setattr(parser, name, value)


def stopped(output: Output, program: Program, begin: int, end: int, line: str, error: Exception) -> CalculationError:
    """Say where and at what the reader stopped."""
    reason = f"{type(error).__name__}: {error}".strip().rstrip(":")
    return CalculationError(
        f"{output.name}:{end}: this {program.name} output cannot be read beyond line {end}, in the block that begins "
        f"at line {begin} ({line.strip()[:60]!r}): {reason[:160]}. If the file was edited or mixed with other text, "
        "take the original; else cut that block out, or compute with another program version."
    )
