"""Collects the faults of all files of a job, so that a user sees every one at once."""

from collections.abc import Collection
from difflib import get_close_matches
from typing import NoReturn

from rateloom.errors import JobError, Problem

LONGEST_TEXT = 500
"""A message is cut there: the wrong value may be a whole file."""


MANY = 50
"""Problems after which nearest names of species and transition states are no longer looked for."""


class Fault(ValueError):  # noqa: N818 - see FileFault
    """Something wrong with a value; whoever knows its place makes a problem of it."""

    def __init__(self, message: str, advice: str = "", inner: tuple[str | int, ...] = ()) -> None:
        super().__init__(message, advice, inner)
        self.message = message
        self.advice = advice
        self.inner = inner
        """Leads from the value to the wrong part of it."""


def refuse(message: str, advice: str = "", inner: tuple[str | int, ...] = ()) -> NoReturn:
    """Raise a fault.

    Raises
    ------
    Fault
        Always.
    """
    raise Fault(message, advice, inner)


class FileFault(Exception):  # noqa: N818 - one name for a fault of a value and of a file
    """A file cannot be read on from a line; line 0 stands for the whole file."""

    def __init__(self, line: int, message: str, advice: str = "") -> None:
        super().__init__(line, message, advice)
        self.line, self.message, self.advice = line, message, advice


def refuse_file(line: int, message: str, advice: str = "") -> NoReturn:
    """Raise a fault of a file.

    Raises
    ------
    FileFault
        Always.
    """
    raise FileFault(line, message, advice)


class Problems:
    """The faults found so far."""

    def __init__(self) -> None:
        self._found: list[Problem] = []
        self._files: dict[str, int] = {}
        self.incomplete = False
        """A file could not be read: what seems undefined may be defined there."""

    def enter(self, file: str) -> None:
        """Note a file; the order of first mention is the order of the report."""
        self._files.setdefault(file, len(self._files))

    def add(self, file: str, line: int, key: str, message: str, advice: str = "") -> None:
        """Note one fault."""
        self.enter(file)
        self._found.append(Problem(file, line, _shown(key), _shown(message), _shown(advice)))

    @property
    def many(self) -> bool:
        """Whether so many were found that looking for what was meant is no more worth the time."""
        return len(self._found) > MANY

    def stop_if_any(self) -> None:
        """Raise what was found.

        Raises
        ------
        JobError
            There is at least one fault; they are in the order of the files and their lines.
        """
        if self._found:
            unique = dict.fromkeys(self._found)  # an alias shows one fault in several places
            raise JobError(tuple(sorted(unique, key=lambda p: (self._files[p.file], p.line))))


def _shown(text: str) -> str:
    """Make a text fit for a terminal, whatever a file holds."""
    if len(text) > LONGEST_TEXT:
        text = f"{text[: LONGEST_TEXT - 3]}..."
    return text if text.isprintable() else "".join(c if c.isprintable() else repr(c)[1:-1] for c in text)


def nearest(word: str, known: Collection[str]) -> str | None:
    """Give the known word that looks most like ``word``, if any does; capitals and small letters count as alike."""
    if len(word) > 100:
        return None
    by_lower: dict[str, str] = {}
    for candidate in sorted(known):
        by_lower.setdefault(candidate.lower(), candidate)
    found = get_close_matches(word.lower(), by_lower, n=1, cutoff=0.65)
    return by_lower[found[0]] if found else None


def suggestion(word: str, known: Collection[str]) -> str:
    """Advise the nearest known word, or tell all of them where they are few and none is near."""
    closest = nearest(word, known)
    if closest:
        return f"Closest: {closest!r}."
    if not known or len(known) > 20:
        return ""
    return f"Known: {', '.join(sorted(known))}."
