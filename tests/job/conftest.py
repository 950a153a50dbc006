"""A job file that holds every key, and a way to change a piece of it."""

from collections.abc import Callable
from pathlib import Path

import pytest

from rateloom.errors import JobError
from rateloom.job import Job, load_job

CODES = frozenset({"soft-mode", "poor-fit", "levels-differ"})
LIMITS = {"small_imaginary_per_cm": 100.0}

WHOLE = (Path(__file__).parent / "whole_job.yaml").read_text(encoding="utf-8")


@pytest.fixture
def load(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Callable[..., Job]:
    """Load a text as ``job.yaml`` of an empty working folder."""
    monkeypatch.chdir(tmp_path)

    def run(text: str | bytes = WHOLE, **other: str) -> Job:
        Path("job.yaml").write_bytes(text if isinstance(text, bytes) else text.encode())
        for name, content in other.items():
            Path(f"{name}.yaml").write_text(content, encoding="utf-8")
        return load_job("job.yaml", known_codes=CODES, known_limits=LIMITS)

    return run


@pytest.fixture
def faults(load: Callable[..., Job]) -> Callable[..., str]:
    """Give the message of a job that cannot be used."""

    def run(text: str | bytes, **other: str) -> str:
        with pytest.raises(JobError) as caught:
            load(text, **other)
        return str(caught.value)

    return run


@pytest.fixture
def changed(faults: Callable[..., str]) -> Callable[[str, str], str]:
    """Give the message of the whole job with one piece replaced."""

    def run(old: str, new: str) -> str:
        assert WHOLE.count(old) == 1
        return faults(WHOLE.replace(old, new))

    return run
