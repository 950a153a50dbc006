"""From remarks to findings, and from findings to what is delivered."""

import pytest

from rateloom.batch.verdict import verdict_of
from rateloom.job import Entity, Job, Place, Reaction
from rateloom.remarks import Remark

PLACE = Place("job.yaml", 1)
CUT = Remark("unfinished-calculation", "cut")
SOFT = Remark("soft-mode", "soft", "40 cm-1", "100 cm-1")


def entity(name: str, kind: str = "species", **accept: str) -> Entity:
    return Entity(name=name, kind=kind, place=PLACE, energy=f"/{name}", accept=pairs(accept))


def pairs(accept: dict[str, str]) -> tuple[tuple[str, str], ...]:
    return tuple((code.replace("_", "-"), reason) for code, reason in accept.items())


def reaction(name: str, reactant: str, **accept: str) -> Reaction:
    return Reaction(
        name=name,
        place=PLACE,
        equation="",
        reactants=(reactant,),
        products=("B",),
        transition_states=(f"ts-{name}",),
        temperatures=(300.0, 400.0, 500.0),
        accept=pairs(accept),
    )


def job(
    *, of_species: dict[str, str] | None = None, of_reaction: dict[str, str] | None = None, **settings: object
) -> Job:
    return Job(
        title="",
        path="/job.yaml",
        files=("/job.yaml",),
        output="/tables",
        temperatures=(300.0, 400.0, 500.0),
        standard_pressure=1e5,
        rate_unit="L mol-1 s-1",
        species=(entity("A", **(of_species or {})), entity("B"), entity("C")),
        transition_states=(entity("ts-one", "transition_state"), entity("ts-two", "transition_state")),
        reactions=(reaction("one", "A", **(of_reaction or {})), reaction("two", "C")),
        **settings,  # type: ignore[arg-type]
    )


def test_an_error_withholds_what_depends_on_it_and_nothing_else() -> None:
    verdict = verdict_of(job(), {("species", "A"): [CUT]}, {})

    assert verdict.withheld == {"one": ("A: unfinished-calculation",)}
    assert verdict.withheld_species == {"A"}


def test_a_warning_withholds_nothing() -> None:
    assert verdict_of(job(), {("species", "A"): [SOFT]}, {}).withheld == {}


def test_an_accepted_error_withholds_nothing_and_keeps_its_reason() -> None:
    verdict = verdict_of(job(of_species={"unfinished_calculation": "seen"}), {("species", "A"): [CUT]}, {})

    assert verdict.withheld == {}
    assert [finding.accepted_because for finding in verdict.findings] == ["seen"]


@pytest.mark.parametrize(
    ("subject", "withheld"), [("ts-one", {}), ("ts-two", {"two": ("ts-two: unfinished-calculation",)})]
)
def test_a_reaction_accepts_for_its_own_saddle_alone(subject: str, withheld: dict[str, tuple[str, ...]]) -> None:
    settings = job(of_reaction={"unfinished_calculation": "seen"})

    assert verdict_of(settings, {("transition_state", subject): [CUT]}, {}).withheld == withheld


def test_an_accept_that_matches_nothing_is_a_finding() -> None:
    verdict = verdict_of(job(of_reaction={"soft_mode": "seen"}), {}, {})

    assert [(f.subject.name, f.code, f.value) for f in verdict.findings] == [
        ("one", "accept-matches-nothing", "soft-mode")
    ]


def test_the_job_file_sets_severities() -> None:
    verdict = verdict_of(job(audit_severities=(("soft-mode", "error"),)), {("species", "C"): [SOFT]}, {})

    assert verdict.withheld == {"two": ("C: soft-mode",)}


def test_numbers_that_could_not_be_computed_are_withheld_even_without_an_error() -> None:
    assert list(verdict_of(job(), {}, {"one": True, "two": False}).withheld) == ["one"]


def test_findings_come_gravest_first_and_each_once() -> None:
    remarks = {("species", "A"): [SOFT, CUT, SOFT], ("species", "B"): [SOFT]}

    verdict = verdict_of(job(), remarks, {})

    assert [(f.severity, f.subject.name) for f in verdict.findings] == [
        ("error", "A"),
        ("warning", "A"),
        ("warning", "B"),
    ]
