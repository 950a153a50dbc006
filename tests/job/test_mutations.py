"""Whatever is done to a job file, it gives a job or a message, never anything else."""

from collections.abc import Callable
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from rateloom.errors import JobError
from rateloom.job import Job, load_job

Outcome = Callable[[bytes], Job | str]
WHOLE = (Path(__file__).parent / "whole_job.yaml").read_text(encoding="utf-8")
PIECES = st.one_of(
    st.sampled_from(
        ["[", "]", "{", "}", ":", "- ", "&a ", "*a", "<<: ", "!!int ", "\t", "\n", "'", '"', "#", "~", "|"]
    ),
    st.sampled_from(
        ["1e999", "-1", "NaN", ".inf", "[]", "{}", "null", "<=>", " + ", "%", "0x1", "1 K", "\x00", "\ud7ff"]
    ),
    st.text(max_size=5),
)


@st.composite
def mutated(draw: st.DrawFn) -> str:
    text = WHOLE
    for _ in range(draw(st.integers(1, 4))):
        start = draw(st.integers(0, len(text)))
        end = min(len(text), start + draw(st.integers(0, 30)))
        text = text[:start] + draw(PIECES) + text[end:]
    return text


@pytest.fixture(scope="module")
def outcome(tmp_path_factory: pytest.TempPathFactory) -> Callable[[bytes], Job | str]:
    """Load some bytes as a job file: the job, or what is said against it."""
    path = tmp_path_factory.mktemp("mutated") / "job.yaml"

    def run(content: bytes) -> Job | str:
        path.write_bytes(content)
        try:
            return load_job(str(path))
        except JobError as error:
            return "".join(problem.message for problem in error.problems)

    return run


def test_the_whole_job_is_a_job(outcome: Outcome) -> None:
    assert isinstance(outcome(WHOLE.encode()), Job)


@settings(deadline=None, max_examples=150)
@given(text=mutated())
def test_mutated_text_gives_a_job_or_a_message(outcome: Outcome, text: str) -> None:
    assert outcome(text.encode("utf-8", errors="replace"))


@settings(deadline=None, max_examples=50)
@given(content=st.binary(max_size=200))
def test_bytes_give_a_message(outcome: Outcome, content: bytes) -> None:
    assert isinstance(outcome(content), str)
