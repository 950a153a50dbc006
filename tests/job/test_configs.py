"""The job files that come with the program can be loaded."""

from pathlib import Path

import pytest

from rateloom.job import load_job

CONFIGS = Path(__file__).resolve().parents[2] / "configs"
PARTS = {"shared-species.yaml"}
"""Included by others, no jobs by themselves."""
JOBS = sorted(file.name for file in CONFIGS.glob("*.yaml") if file.name not in PARTS)


@pytest.mark.parametrize("name", JOBS)
def test_a_job_file_of_ours_can_be_used(name: str) -> None:
    job = load_job(str(CONFIGS / name))
    assert job.reactions
    assert Path(job.output) == CONFIGS.parent / "results" / Path(name).stem


def test_the_demo_is_large_enough_to_show_a_batch() -> None:
    job = load_job(str(CONFIGS / "cofiring.yaml"))
    assert len(job.reactions) >= 20
    assert {name for reaction in job.reactions for name in reaction.transition_states} == {
        entity.name for entity in job.transition_states
    }


def test_the_isotopes_are_those_of_a_balanced_reaction() -> None:
    job = load_job(str(CONFIGS / "isotopes.yaml"))
    heavy = {entity.name: len(entity.isotopes) for entity in (*job.species, *job.transition_states)}
    for reaction in job.reactions:
        totals = {sum(heavy[name] for name in side) for side in (reaction.reactants, reaction.products)}
        assert totals == {heavy[reaction.transition_states[0]]}
