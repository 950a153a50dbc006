"""Files that are no job files, and files that include others."""

import os
from collections.abc import Callable
from pathlib import Path

import pytest

from rateloom.errors import JobError
from rateloom.job import Job, Place, load_job

Load = Callable[..., Job]
Faults = Callable[..., str]
HEAD = "temperatures: [300, 400, 500]\n"


@pytest.mark.parametrize(
    ("content", "message"),
    [
        (b"", "job.yaml: the file is empty\n    Write at least temperatures and species into it."),
        (b"  \n\n", "job.yaml: the file is empty\n"),
        (b"# nothing\n", "job.yaml: the file is empty\n"),
        (b"title: a\xe9b\n", "job.yaml:1: byte 0xe9 is not UTF-8 text\n    Save the file as UTF-8"),
        ("title: a".encode("utf-16"), "job.yaml:1: the file is UTF-16, not UTF-8\n    Save it as UTF-8."),
        (b"title: a\nx: \x00\n", "job.yaml:2: the control character U+0000 stands in the text\n"),
        (b"\x1f\x8b\x08\x00", "job.yaml:1: byte 0x8b is not UTF-8 text\n"),
        (b"a: 1\n\tb: 2\n", "A tab stands in the indentation: replace it by blanks."),
        (b"a: [1, 2\nb: 3\n", "job.yaml:2: YAML: did not find expected ',' or ']' (column 2, "),
        (b"a: b: c\n", "job.yaml:1: YAML: mapping values are not allowed in this context (column 5"),
        (b"just text\n", "job.yaml:1: a job file is a block of 'key: value' lines\n    Begin with a line such as"),
        (b"- a\n- b\n", "job.yaml:1: a job file is a block of 'key: value' lines\n"),
        (b"a: 1\n---\nb: 2\n", "job.yaml:2: a second document begins here\n    Remove the line '---'"),
        (b"title: !!python/name:os.system ''\n", "the YAML tag 'python/name:os.system' is not used in job files\n"),
        (b"title: !mine x\n", "job.yaml:1: title: the YAML tag '!mine' is not used in job files\n"),
        (b"[a, b]: 1\n", "job.yaml:1: a key must be a word, not a block or a list\n"),
        (b"a: *x\n", "job.yaml:1: a: no anchor is called '&x'\n    Quote the text if a '*' is meant: '*x'."),
        (b"a: &x [*x]\n", "job.yaml:1: a.0: the alias '*x' stands inside what it names\n"),
        (b"a: &x 1\n<<: *x\n", "job.yaml:2: <<: '<<' merges blocks alone\n"),
    ],
)
def test_what_is_no_job_file_is_refused(faults: Faults, content: bytes, message: str) -> None:
    assert message in faults(content)


def test_deep_nesting_is_refused(faults: Faults) -> None:
    assert "blocks and lists are nested more than 30 deep" in faults("a: " + "[" * 900)
    assert "nesting depth" in faults("a: " + "[" * 100_000)


def test_exploding_aliases_are_refused(faults: Faults) -> None:
    lines = ["a0: &a0 [x, x, x, x, x, x, x, x, x, x]"]
    lines += [f"a{i}: &a{i} [{', '.join([f'*a{i - 1}'] * 10)}]" for i in range(1, 12)]
    assert "job.yaml:6: a5.7: aliases expand to more than 1000000 entries" in faults("\n".join(lines))


def test_anchors_and_merges_are_read(load: Load) -> None:
    job = load(
        "temperatures: &grid [300, 400, 500]\nspecies:\n  A: &a {frequencies: a.out, charge: 1, multiplicity: 2}\n"
        "  B:\n    multiplicity: 3\n    <<: *a\n  C: *a\n"
        "transition_states: {ts: {frequencies: ts.out}}\n"
        "reactions: {r: {equation: A <=> B, transition_state: ts, temperatures: *grid}}\n"
    )
    assert [(e.name, e.charge, e.multiplicity) for e in job.species] == [("A", 1, 2), ("B", 1, 3), ("C", 1, 2)]
    assert job.reactions[0].temperatures == job.temperatures


def test_a_byte_order_mark_is_no_fault(load: Load) -> None:
    assert load(b"\xef\xbb\xbf" + HEAD.encode() + b"species: {H: {energy: h.out}}\n").species[0].name == "H"


def test_a_missing_file_names_the_nearest(load: Load) -> None:
    load()
    with pytest.raises(JobError) as caught:
        load_job("jop.yaml")
    assert str(caught.value) == "jop.yaml: there is no such file\n    Closest: 'job.yaml' in the same folder."


def test_a_folder_and_a_pipe_are_refused(tmp_path: Path) -> None:
    with pytest.raises(JobError, match="this is a folder, not a job file"):
        load_job(str(tmp_path))
    os.mkfifo(tmp_path / "pipe.yaml")  # opening it would wait for ever
    with pytest.raises(JobError, match="this is not an ordinary file"):
        load_job(str(tmp_path / "pipe.yaml"))


@pytest.mark.parametrize("path", ["a\0b", "", "x" * 5000])
def test_an_impossible_path_is_refused(path: str) -> None:
    with pytest.raises(JobError):
        load_job(path)


def test_a_file_too_large_is_refused(tmp_path: Path) -> None:
    with (tmp_path / "job.yaml").open("wb") as file:
        file.truncate(50_000_001)
    with pytest.raises(JobError, match="the file is larger than 50 MB"):
        load_job(str(tmp_path / "job.yaml"))


def test_includes_bring_entries_with_their_own_folder(load: Load, tmp_path: Path) -> None:
    (tmp_path / "shared").mkdir()
    (tmp_path / "shared" / "radicals.yaml").write_text(
        "calculations: outputs\ninclude: atoms.yaml\nspecies: {OH: {frequencies: oh.out}}\n", encoding="utf-8"
    )
    (tmp_path / "shared" / "atoms.yaml").write_text("species: {O: {energy: o.out}}\n", encoding="utf-8")
    job = load(f"{HEAD}include: [shared/radicals.yaml, shared/atoms.yaml]\nspecies: {{H: {{energy: h.out}}}}\n")
    assert [entity.name for entity in job.species] == ["H", "OH", "O"]
    assert job.species[1].frequencies == str(tmp_path / "shared" / "outputs" / "oh.out")
    assert job.species[2].energy == str(tmp_path / "shared" / "o.out")
    assert job.species[2].place == Place(str(Path("shared/atoms.yaml")), 1)
    assert [Path(file).name for file in job.files] == ["job.yaml", "radicals.yaml", "atoms.yaml"]


def test_a_circle_of_includes_is_refused_with_its_links(faults: Faults) -> None:
    text = faults(f"{HEAD}include: [a.yaml]\n", a="include: [b.yaml]\n", b="include: [a.yaml]\n")
    assert text == (
        "b.yaml:1: include.0: the includes go round in a circle: a.yaml -> b.yaml -> a.yaml\n    Remove this include."
    )
    assert "circle: job.yaml -> job.yaml" in faults(f"{HEAD}include: job.yaml\n")


def test_a_name_taken_twice_names_both_places(faults: Faults) -> None:
    text = faults(
        f"{HEAD}include: [a.yaml]\nspecies:\n  H: {{energy: h.out}}\n", a="species:\n\n  H: {energy: i.out}\n"
    )
    assert text == (
        "a.yaml:3: species.H: the name 'H' is taken\n"
        "    It stands in job.yaml:4 already. Rename or remove one of them."
    )


def test_an_included_file_sets_nothing_for_the_job(faults: Faults) -> None:
    text = faults(f"{HEAD}include: [a.yaml]\nspecies: {{H: {{energy: h.out}}}}\n", a="title: x\nspecie: {}\n")
    assert "a.yaml:1: title: an included file does not set 'title'\n    Move it to the job file." in text
    assert "a.yaml:2: specie: unknown key 'specie'\n    Closest: 'species'." in text


def test_a_missing_include_is_told_where_it_is_named_and_nothing_else(faults: Faults) -> None:
    text = faults(
        f"{HEAD}include:\n  - a.yaml\nspecies: {{H: {{energy: h.out}}}}\n"
        "reactions: {r: {equation: H + O <=> OH, transition_state: x}}\n"
    )
    assert text.splitlines()[0] == "job.yaml:3: include.0: 'a.yaml': there is no such file"
    assert text.count("yaml:") == 1
