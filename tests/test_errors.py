"""Errors come back whole from other processes."""

import pickle

import pytest

from rateloom import errors
from rateloom.errors import JobError, Problem, RateloomError, UnknownCodeError


def family(root: type[RateloomError]) -> list[type[RateloomError]]:
    """A class and all that are made from it."""
    return [root, *(each for child in root.__subclasses__() for each in family(child))]


PROBLEM = Problem("job.yaml", 27, "reactions.ch4-h", "no transition state is called 'ts-ch4-0'", "Correct line 27.")
ARGUMENTS: dict[type[RateloomError], tuple] = {  # where they are not one message
    JobError: ((PROBLEM, Problem("job.yaml", 0, "", "is empty")),),
    UnknownCodeError: ("soft-mod", ("soft-mode",)),
}
CLASSES = [each for each in family(RateloomError) if each.__module__ == errors.__name__]


@pytest.mark.parametrize("kind", CLASSES, ids=lambda kind: kind.__name__)
@pytest.mark.parametrize("protocol", range(2, pickle.HIGHEST_PROTOCOL + 1))
def test_every_error_survives_pickling(kind: type[RateloomError], protocol: int) -> None:
    error = kind(*ARGUMENTS.get(kind, ("ch4.out: line 12: what happened, and what to do",)))
    error.add_note("while reading 'CH4'")

    again = pickle.loads(pickle.dumps(error, protocol))

    assert type(again) is kind
    assert str(again) == str(error) != ""
    assert again.args == error.args
    assert {k: v for k, v in vars(again).items() if k != "__notes__"} == {
        k: v for k, v in vars(error).items() if k != "__notes__"
    }
    assert again.__notes__ == ["while reading 'CH4'"]


def test_the_tree_in_the_docstring_is_the_one_there_is() -> None:
    assert errors.__doc__ is not None
    drawn = [word for word in errors.__doc__.split() if word.endswith("Error")]

    assert drawn == [kind.__name__ for kind in CLASSES]


def test_job_error_writes_every_problem_with_its_place() -> None:
    error = JobError(*ARGUMENTS[JobError])

    assert str(error) == (
        "job.yaml:27: reactions.ch4-h: no transition state is called 'ts-ch4-0'\n"
        "    Correct line 27.\n"
        "job.yaml: is empty"
    )


def test_unknown_code_names_the_closest_ones() -> None:
    assert str(UnknownCodeError("soft-mod", ("soft-mode",))) == (
        "no finding is called 'soft-mod'. Closest: soft-mode."
    )
    assert str(UnknownCodeError("x", ())) == "no finding is called 'x'."
