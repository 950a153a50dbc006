"""Loads a job: reads its files, validates every entry by itself, and makes the records whole."""

import os
from collections.abc import Collection
from pathlib import Path
from typing import NamedTuple, TypeAlias, TypeVar

from rateloom.job.entities import TRANSITION_STATE, entity_of
from rateloom.job.files import SourceFile, read_files
from rateloom.job.model import Entity, FrequencyScale, Job, Place, Reaction
from rateloom.job.names import name_fault
from rateloom.job.problems import Problems, suggestion
from rateloom.job.reactions import Defaults, Known, reaction_of
from rateloom.job.schema import SECTIONS, DefaultsEntry, IncludedFile, JobFile
from rateloom.job.settings import scale_of, temperatures_of
from rateloom.job.tree import Block
from rateloom.job.validate import Source

FileType = TypeVar("FileType", bound=IncludedFile)


class Named(NamedTuple):
    """An entry of a section: its name, where it stands, and the folder of its file's calculations."""

    name: str
    source: Source
    folder: str


Sections: TypeAlias = dict[str, dict[str, Named]]


def load_job(
    path: str,
    output: str | None = None,
    *,
    known_limits: Collection[str] | None = None,
    known_codes: Collection[str] | None = None,
) -> Job:
    """Load a job file with everything it includes.

    Parameters
    ----------
    path
        The job file, absolute or relative to the working folder; messages name it as it is given here.
    output
        Output folder that goes before the one of the job file.
    known_limits
        Thresholds that ``audit: limits:`` may set; unchecked where None.
    known_codes
        Findings that may be accepted or given a severity; unchecked where None.

    Returns
    -------
    Job
        Checked, in base units, defaults resolved, in the order of the files.

    Raises
    ------
    JobError
        The job cannot be used; it holds every problem of every file.
    """
    problems = Problems()
    files = read_files(path, problems)
    if not files:
        problems.stop_if_any()
    settings = _settings(JobFile, files[0], problems)
    sections = _sections(files, settings, problems)
    _check_names(Source(path, (), 1, files[0].tree), sections, known_limits, known_codes, problems)
    scale = scale_of(settings.defaults.frequency_scale if settings else None, FrequencyScale())
    species = _entities("species", sections["species"], scale, problems)
    states = _entities(TRANSITION_STATE, sections["transition_states"], scale, problems)
    reactions = _reactions(sections, settings, problems)
    problems.stop_if_any()
    assert settings is not None
    return Job(
        title=settings.title or files[0].path.stem,
        path=str(files[0].path),
        files=tuple(str(file.path) for file in files),
        output=_output(output, settings.output, files[0].path),
        temperatures=temperatures_of(settings.temperatures),
        standard_pressure=settings.standard_pressure,
        rate_unit=settings.rate_unit,
        species=species,
        transition_states=states,
        reactions=reactions,
        audit_limits=tuple(sorted(settings.audit.limits.items())),
        audit_severities=tuple(sorted(settings.audit.severities.items())),
    )


def _settings(model: type[FileType], file: SourceFile, problems: Problems) -> FileType | None:
    """Validate what a file holds beside its sections."""
    source = Source(file.shown, (), 1, file.tree)
    foreign = [key for key in file.tree if key in JobFile.model_fields and key not in model.model_fields]
    for key in foreign:
        source.tell(problems, (key,), f"an included file does not set {key!r}", "Move it to the job file.")
    return source.without(*SECTIONS, *foreign).validate(model, problems)


def _sections(files: list[SourceFile], settings: JobFile | None, problems: Problems) -> Sections:
    """Gather the named entries of all files."""
    sections: Sections = {section: {} for section in SECTIONS}
    for index, file in enumerate(files):
        own = settings if index == 0 else _settings(IncludedFile, file, problems)
        folder = _absolute(file.path.parent, own.calculations if own else ".")
        for section in SECTIONS:
            _collect(section, file, folder, sections[section], problems)
    if not (problems.incomplete or any(file.tree.get("species") for file in files)):
        problems.add(files[0].shown, 0, "species", "there are no species", "Add them under 'species:'.")
    return sections


def _collect(section: str, file: SourceFile, folder: str, found: dict[str, Named], problems: Problems) -> None:
    """Gather the entries of one section of one file; a name that is taken is a fault."""
    tree = file.tree.get(section)
    if tree is None:
        return
    if not isinstance(tree, Block):
        line = file.tree.lines[section]
        problems.add(
            file.shown, line, section, "a block of named entries is wanted here", "Write 'name: {...}' lines."
        )
        return
    for name, entry in tree.items():
        source = Source(file.shown, (section, name), tree.lines[name], entry)
        if fault := name_fault(name):
            problems.add(file.shown, source.line, section, *fault)
        if name in found:
            other = found[name].source
            advice = f"It stands in {other.file}:{other.line} already. Rename or remove one of them."
            source.tell(problems, (), f"the name {name!r} is taken", advice)
        else:
            found[name] = Named(name, source, folder)


def _check_names(
    job: Source,
    sections: Sections,
    known_limits: Collection[str] | None,
    known_codes: Collection[str] | None,
    problems: Problems,
) -> None:
    """See that the findings and limits that are named anywhere exist."""
    audit = job.part("audit")
    _check_known(audit, "limits", "limit", known_limits, problems)
    _check_known(audit, "severities", "finding", known_codes, problems)
    for entries in sections.values():
        for entry in entries.values():
            _check_known(entry.source, "accept", "finding", known_codes, problems)


def _check_known(
    source: Source | None, key: str, what: str, known: Collection[str] | None, problems: Problems
) -> None:
    """See that the findings or limits named under a key exist."""
    if source is None or known is None:
        return
    for path, name in source.texts(key):
        if len(path) == 2 and name not in known:
            source.tell(problems, path, f"no {what} is called {name!r}", suggestion(name, known))


def _entities(kind: str, entries: dict[str, Named], scale: FrequencyScale, problems: Problems) -> tuple[Entity, ...]:
    made = (entity_of(name, kind, source, folder, scale, problems) for name, source, folder in entries.values())
    return tuple(entity for entity in made if entity is not None)


def _reactions(sections: Sections, settings: JobFile | None, problems: Problems) -> tuple[Reaction, ...]:
    chosen = settings.defaults if settings else DefaultsEntry()
    temperatures = temperatures_of(settings.temperatures) if settings else ()
    defaults = Defaults(temperatures, chosen.tunnelling or "eckart", chosen.fit)
    known = Known(_places(sections["species"]), _places(sections["transition_states"]), not problems.incomplete)
    entries = sections["reactions"].values()
    made = (reaction_of(name, source, defaults, known, problems) for name, source, _ in entries)
    return tuple(reaction for reaction in made if reaction is not None)


def _places(entries: dict[str, Named]) -> dict[str, Place]:
    return {name: Place(entry.source.file, entry.source.line) for name, entry in entries.items()}


def _output(asked: str | None, written: str | None, job: Path) -> str:
    if asked is not None:
        return os.path.abspath(asked)  # noqa: PTH100 - resolve() would follow links
    return _absolute(job.parent, written or f"{job.stem}-results")


def _absolute(folder: Path, name: str) -> str:
    return os.path.normpath(folder / name)
