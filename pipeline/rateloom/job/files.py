"""Reads a job file and what it includes, each file once; a circle of includes is refused."""

import os
from dataclasses import dataclass
from pathlib import Path

from rateloom.job.compose import compose
from rateloom.job.problems import FileFault, Problems, refuse_file
from rateloom.job.text import read_text
from rateloom.job.tree import Block
from rateloom.job.validate import Source


@dataclass(frozen=True, slots=True)
class SourceFile:
    """One YAML file of a job."""

    shown: str
    """Name for messages: as the user wrote it."""
    path: Path
    """Absolute."""
    tree: Block


def read_files(path: str, problems: Problems) -> list[SourceFile]:
    """Read a job file and all files that it includes, the job file first."""
    reader = _Reader(problems)
    try:
        reader.read(path, ())
    except FileFault as fault:
        problems.add(path, fault.line, "", fault.message, fault.advice)
    return reader.files


class _Reader:
    """Follows includes."""

    def __init__(self, problems: Problems) -> None:
        self._problems = problems
        self._seen: set[Path] = set()
        self.files: list[SourceFile] = []

    def read(self, shown: str, chain: tuple[tuple[Path, str], ...]) -> None:
        """Read one file and its includes; ``chain`` are the files that lead to it.

        Raises
        ------
        FileFault
            On line 0: the file cannot be had at all, which is a fault of the line that names it.
        """
        path, identity = _paths(shown)
        above = [known for known, _ in chain]
        if identity in above:
            circle = [name for _, name in chain[above.index(identity) :]]
            refuse_file(
                0, f"the includes go round in a circle: {' -> '.join([*circle, shown])}", "Remove this include."
            )
        if identity in self._seen:
            return
        self._seen.add(identity)
        self._problems.enter(shown)
        tree = self._tree(shown, path)
        if tree is not None:
            self.files.append(SourceFile(shown, path, tree))
            self._follow(Source(shown, (), 1, tree), (*chain, (identity, shown)))

    def _tree(self, shown: str, path: Path) -> Block | None:
        try:
            return compose(read_text(path), shown, self._problems)
        except FileFault as fault:
            self._problems.incomplete = True
            if fault.line == 0:
                raise
            self._problems.add(shown, fault.line, "", fault.message, fault.advice)
            return None

    def _follow(self, source: Source, chain: tuple[tuple[Path, str], ...]) -> None:
        for path, name in source.texts("include"):
            target = os.path.normpath(Path(source.file).parent / name.strip())
            try:
                if name.strip():  # an empty one is told by the schema
                    self.read(target, chain)
            except FileFault as fault:
                self._problems.incomplete = True  # what seems undefined may be defined there
                message = fault.message if " -> " in fault.message else f"{target!r}: {fault.message}"
                source.tell(self._problems, path, message, fault.advice)


def _paths(shown: str) -> tuple[Path, Path]:
    """Absolute path, and the same with links followed, which tells two names of one file apart."""
    try:
        path = Path(os.path.abspath(shown))  # noqa: PTH100 - absolute() keeps '..', resolve() follows links
        return path, path.resolve()
    except (OSError, ValueError, RuntimeError) as error:
        refuse_file(0, f"this is no usable path: {error}")
