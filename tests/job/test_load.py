"""The whole way from a job file to records, and what is said of every wrong value in one."""

import pickle
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest
from scipy.constants import atm, c, h

from rateloom.errors import JobError
from rateloom.job import FitSettings, FrequencyScale, Job, Place, load_job

Load = Callable[..., Job]
Faults = Callable[..., str]
Changed = Callable[[str, str], str]


def test_a_whole_job_comes_in_base_units_with_defaults_resolved(load: Load, tmp_path: Path) -> None:
    job = load()
    assert job.title == "Hydrogen transfer"
    assert (job.path, job.files) == (str(tmp_path / "job.yaml"), (str(tmp_path / "job.yaml"),))
    assert job.output == str(tmp_path / "tables")
    assert job.standard_pressure == atm
    assert job.rate_unit == "cm3 mol-1 s-1"
    assert (job.temperatures[0], job.temperatures[-1], len(job.temperatures)) == (300.0, 2500.0, 45)
    assert job.audit_limits == (("small_imaginary_per_cm", 50.0),)
    assert job.audit_severities == (("soft-mode", "note"),)
    assert [entity.name for entity in job.species] == ["CH4", "H", "CH3", "H2", "NO", "HCl"]
    assert {entity.kind for entity in job.transition_states} == {"transition_state"}


def test_species_carry_files_overrides_and_scale_factors(load: Load, tmp_path: Path) -> None:
    methane, atom, methyl, hydrogen, nitric_oxide, chloride = load().species
    assert methane.frequencies == str(tmp_path / "outputs" / "ch4.out.gz")
    assert methane.place == Place("job.yaml", 15)
    assert methane.frequency_scale == FrequencyScale(0.977, 0.961)
    assert (atom.frequencies, atom.energy) == (None, str(tmp_path / "outputs" / "h_ccsdt.out.gz"))
    assert methyl.frequency_scale == FrequencyScale(0.98, 0.98)
    assert (methyl.charge, methyl.multiplicity) == (0, 2)
    assert (hydrogen.symmetry_number, hydrogen.optical_isomers, hydrogen.isotopes) == (2, 1, ((2, "D"),))
    # hc from the constants of scipy, exact to rounding
    assert nitric_oxide.electronic_levels == ((2, 0.0), (2, pytest.approx(121.1e2 * h * c, rel=1e-14)))
    assert nitric_oxide.spin_orbit_lowering == pytest.approx(60e2 * h * c, rel=1e-14)
    assert chloride.given is not None
    assert chloride.given.energy_hartree == -460.2
    assert chloride.given.frequencies_per_cm == (2990.9,)
    assert chloride.given.geometry_angstrom == ((0.0, 0.0, 0.0), (0.0, 0.0, 1.2746))


def test_reactions_take_their_own_settings_before_the_job_s(load: Load) -> None:
    job = load()
    own, plain = job.reactions
    assert own.equation == "CH4 + H <=> CH3 + H2"
    assert (own.reactants, own.products) == (("CH4", "H"), ("CH3", "H2"))
    assert own.temperatures == (300.0, 500.0, 1000.0)
    assert own.fit == FitSettings("modified-arrhenius", 298.15, 0.1)
    assert (own.path_degeneracy, own.accept) == (4.0, (("poor-fit", "three points only"),))
    assert plain.reactants == ("CH3", "CH3")
    assert plain.temperatures == job.temperatures
    assert plain.tunnelling == "wigner"
    assert plain.fit == replace(own.fit, tolerance=0.05)


def test_little_is_needed(load: Load, tmp_path: Path) -> None:
    job = load("temperatures: [300, 400, 500]\nspecies:\n  H2: {frequencies: h2.out}\n")
    assert (job.title, job.output) == ("job", str(tmp_path / "job-results"))
    assert job.species[0].frequencies == str(tmp_path / "h2.out")
    assert (job.standard_pressure, job.rate_unit) == (1e5, "cm3 molecule-1 s-1")


def test_an_output_folder_asked_for_goes_before_the_file_s(load: Load, tmp_path: Path) -> None:
    load()
    assert load_job("job.yaml", output="elsewhere").output == str(tmp_path / "elsewhere")


@pytest.mark.parametrize("name", ["NO", "N", "Y", "ON", "1e5", "null", "(CH3)2CO", "1-butene", "i-C3H7"])
def test_a_name_is_the_text_that_stands_there(load: Load, name: str) -> None:
    text = f"temperatures: [300, 400, 500]\nspecies:\n  {name}: {{frequencies: a.out}}\n"
    text += f"transition_states:\n  {name}: {{frequencies: ts.out}}\n"
    text += f"reactions:\n  yes: {{equation: {name} <=> 2 {name}, transition_state: '{name}'}}\n"
    job = load(text)
    assert job.species[0].name == name
    assert job.reactions[0].products == (name, name)
    assert job.reactions[0].name == "yes"


@pytest.mark.parametrize("spacing", ["linear", "reciprocal", "log"])
def test_grids_are_even_in_what_they_name(load: Load, spacing: str) -> None:
    import numpy as np

    text = f"temperatures: {{from: 300, to: 1500, count: 9, spacing: {spacing}}}\nspecies: {{H: {{energy: h.out}}}}\n"
    grid = np.array(load(text).temperatures)
    even = {"linear": grid, "reciprocal": 1 / grid, "log": np.log(grid)}[spacing]
    np.testing.assert_allclose(np.diff(even), np.diff(even)[0], rtol=1e-10)  # rounding of differences
    assert (grid[0], grid[-1]) == (300.0, 1500.0)


CASES = [
    (
        "    transition_state: ts-ch4-h\n",
        "    transition_state: ts-ch4-0\n",
        "job.yaml:27: reactions.ch4-h.transition_state: no transition state is called 'ts-ch4-0'\n"
        "    Closest: 'ts-ch4-h' (line 23). Correct line 27, or add 'ts-ch4-0' under transition_states.",
    ),
    (
        "CH4 + H  <=> CH3 + H2",
        "CH4 + H  <=> CH3 + H3",
        "job.yaml:26: reactions.ch4-h.equation: no species is called 'H3'\n"
        "    Closest: 'CH3' (line 17). Correct line 26, or add 'H3' under species.",
    ),
    ("title:", "titel:", "job.yaml:1: titel: unknown key 'titel'\n    Closest: 'title'."),
    ("tolerance: 10 %", "tol: 1", "job.yaml:29: reactions.ch4-h.fit.tol: unknown key 'tol'\n"),
    (
        "symmetry_number: 2",
        "symmetry: 2",
        "species.H2.symmetry: unknown key 'symmetry'\n    Closest: 'symmetry_number'.",
    ),
    ("zero_point: 0.977, ", "", "job.yaml:8: defaults.frequency_scale: the key 'zero_point' is missing\n"),
    ("modes: 0.961", "modes: 96.1", "job.yaml:8: defaults.frequency_scale.modes: '96.1' is out of range\n"),
    (
        "tunnelling: wigner",
        "tunnelling: wignr",
        "job.yaml:9: defaults.tunnelling: 'wignr' is not known\n    Closest: 'wigner'.",
    ),
    (
        "form: modified-arrhenius",
        "form: arrhenius",
        "defaults.fit.form: 'arrhenius' is not known\n    Closest: 'modified-",
    ),
    (
        "tolerance: 5 %",
        "tolerance: 5",
        "job.yaml:10: defaults.fit.tolerance: '5' is out of range\n    It lies above 0 and",
    ),
    ("from: 300 K", "from: 3000 K", "temperatures.from: 'from' (3000 K) is not below 'to' (2500 K)\n    Swap them."),
    (
        "from: 300 K",
        "from: 300 kg",
        "job.yaml:4: temperatures.from: '300 kg' is not a temperature\n    Write a temperature",
    ),
    (
        "from: 300 K",
        "from: -5 K",
        "job.yaml:4: temperatures.from: '-5 K' is out of range\n    Temperatures lie between",
    ),
    (
        "from: 300 K",
        "from: warm",
        "job.yaml:4: temperatures.from: 'warm' is no number\n    Write a temperature such as",
    ),
    ("count: 45", "count: 2", "job.yaml:4: temperatures.count: 2 is out of range\n    Write a whole number from 3"),
    ("count: 45", "count: 4_5", "job.yaml:4: temperatures.count: '4_5' is no whole number\n"),
    (
        "spacing: reciprocal",
        "spacing: inverse",
        "temperatures.spacing: 'inverse' is not known\n    Known: linear, log, rec",
    ),
    (
        "[500, 300 K, 1000]",
        "[500, 1000]",
        "job.yaml:28: reactions.ch4-h.temperatures: 2 temperatures are too few\n    A fit",
    ),
    ("[500, 300 K, 1000]", "[500, 300, 500]", "reactions.ch4-h.temperatures.2: 500 K stands twice in the list\n"),
    ("[500, 300 K, 1000]", "warm", "job.yaml:28: reactions.ch4-h.temperatures: a list is wanted here\n"),
    ("path_degeneracy: 4", "path_degeneracy: 0", "reactions.ch4-h.path_degeneracy: '0' is out of range\n"),
    ("standard_pressure: 1 atm", "standard_pressure: 0", "job.yaml:5: standard_pressure: '0' is out of range\n"),
    ("rate_unit: cm3 mol-1 s-1", "rate_unit: cm3/s", "job.yaml:6: rate_unit: 'cm3/s' is not known\n"),
    (
        "small_imaginary_per_cm: 50",
        "small_imaginary: 50",
        "audit.limits.small_imaginary: no limit is called 'small_imag",
    ),
    (
        "soft-mode: note",
        "softmode: note",
        "severities.softmode: no finding is called 'softmode'\n    Closest: 'soft-mode'.",
    ),
    (
        "soft-mode: note",
        "soft-mode: fatal",
        "audit.severities.soft-mode: 'fatal' is not known\n    Known: error, note, warn",
    ),
    (
        "{poor-fit: ",
        "{poor-fitt: ",
        "job.yaml:31: reactions.ch4-h.accept.poor-fitt: no finding is called 'poor-fitt'\n",
    ),
    ('"three points only"', '""', "job.yaml:31: reactions.ch4-h.accept.poor-fit: the text is empty\n"),
    (
        "{energy: h_ccsdt.out.gz}",
        "{charge: 0}",
        "job.yaml:16: species.H: there is no calculation here\n    Add 'freq",
    ),
    (
        "{energy: h_ccsdt.out.gz}",
        "{energy: }",
        "job.yaml:16: species.H.energy: there is no value\n    Write one or remove",
    ),
    (
        "{energy: h_ccsdt.out.gz}",
        "h.out",
        "job.yaml:16: species.H: a block of 'key: value' lines is wanted here, not the",
    ),
    (
        "{energy: h_ccsdt.out.gz}",
        "[h]",
        "job.yaml:16: species.H: a block of 'key: value' lines is wanted here, not a list",
    ),
    (
        "{energy: h_ccsdt.out.gz}",
        "",
        "job.yaml:16: species.H: a block of 'key: value' lines is wanted here, not nothing\n",
    ),
    ("frequencies: ts_ch4_h.out.gz, ", "", "transition_states.ts-ch4-h: there is only an energy here\n"),
    ("charge: 0", "charge: neutral", "job.yaml:17: species.CH3.charge: 'neutral' is no whole number\n"),
    ("multiplicity: 2", "multiplicity: 0", "job.yaml:17: species.CH3.multiplicity: 0 is out of range\n"),
    ("multiplicity: 2", "multiplicity: 02", "job.yaml:17: species.CH3.multiplicity: '02' is no whole number\n"),
    ("optical_isomers: 1", "optical_isomers: 0.5", "species.H2.optical_isomers: '0.5' is no whole number\n"),
    ("{2: D}", "{0: D}", "job.yaml:18: species.H2.isotopes.0: 0 is out of range\n"),
    (
        "{2: D}",
        "{2: heavy}",
        "job.yaml:18: species.H2.isotopes.2: 'heavy' is no isotope\n    Write D, T or a mass number",
    ),
    ("[[2, 0], [2, 121.1 cm-1]]", "[[2, 5 cm-1]]", "electronic_levels.0.1: the first level is not at 0\n"),
    (
        "[[2, 0], [2, 121.1 cm-1]]",
        "[[2, 0], [1, 0]]",
        "electronic_levels.1.1: this level is not above the one before\n",
    ),
    (
        "[[2, 0], [2, 121.1 cm-1]]",
        "[[2, 0, 1]]",
        "electronic_levels.0: a level as [degeneracy, energy] is wanted here\n",
    ),
    ("[[2, 0], [2, 121.1 cm-1]]", "[]", "job.yaml:19: species.NO.electronic_levels: the list is empty"),
    ("60 cm-1", "-60 cm-1", "job.yaml:19: species.NO.spin_orbit_lowering: '-60 cm-1' is out of range\n"),
    ("energy: -460.2 hartree, ", "", "job.yaml:20: species.HCl.given: the key 'energy' is missing\n"),
    ("-460.2 hartree", "-460.2 kg", "job.yaml:20: species.HCl.given.energy: '-460.2 kg' is not an energy\n"),
    ("[2990.9]", "[2990.9, 1]", "species.HCl.given.frequencies: there are 2 frequencies, but 2 atoms have 1\n"),
    ("[2990.9]", "[0]", "job.yaml:20: species.HCl.given.frequencies.0: a vibration has no frequency of 0\n"),
    ("[Cl, 0, 0, 1.2746]", "[CL, 0, 0, 1.2746]", "given.geometry.1.0: 'CL' is no element\n    Closest: 'Cl'."),
    ("[Cl, 0, 0, 1.2746]", "[Cl, 0, 0]", "geometry.1: an atom as [element, x, y, z] is wanted here\n"),
    ("[Cl, 0, 0, 1.2746]", "[Cl, 0, 0, 0.01]", "species.HCl.given.geometry.1: atoms 1 and 2 lie at one place\n"),
    ("HCl: {given:", "HCl: {energy: hcl.out, given:", "species.HCl.energy: an output file stands beside 'given'\n"),
    ("HCl: {given:", "HCl: {isotopes: {3: D}, given:", "species.HCl.isotopes.3: there is no atom 3, only 2\n"),
    ("HCl: {given:", "HCl: {isotopes: {2: D}, given:", "species.HCl.isotopes.2: atom 2 is Cl, not H\n"),
    (
        "transition_state: [ts-ch4-h]",
        "transition_state: [ts-ch4-h, ts-ch4-h]",
        "transition_state.1: 'ts-ch4-h' stands twice",
    ),
    ("transition_state: [ts-ch4-h]", "transition_state: []", "reactions.plain.transition_state: the list is empty"),
    ("transition_state: [ts-ch4-h]", "tunnelling: none", "reactions.plain: the key 'transition_state' is missing\n"),
    ("ts-ch4-h: {", "ts/ch4: {", "job.yaml:23: transition_states: 'ts/ch4' is not a name\n    Names hold letters"),
    (
        "  H: {",
        "  CH4: {",
        "job.yaml:16: species.CH4: the key 'CH4' stands twice in one block\n    It stands on line 15",
    ),
]


@pytest.mark.parametrize(("old", "new", "message"), CASES, ids=[f"{old} -> {new}".strip() for old, new, _ in CASES])
def test_a_wrong_value_is_named_with_place_and_advice(changed: Changed, old: str, new: str, message: str) -> None:
    assert message in changed(old, new)


def test_a_wrong_piece_brings_no_false_complaints(changed: Changed) -> None:
    assert changed("charge: 0", "charge: x").count("job.yaml") == 1


def test_every_problem_comes_at_once_in_the_order_of_lines(faults: Faults) -> None:
    text = faults(
        "temperatures: {from: 3000, to: 300, count: 5}\nspecies:\n  CH4: {frequencie: a}\n  H: {energy: }\n"
        "reactions:\n  r: {equation: CH4 + X = H, path_degeneracy: -1}\nstandard_pressure: 1 K\n"
    )
    assert [line.split(": ")[0] for line in text.splitlines() if not line.startswith(" ")] == [
        "job.yaml:1",
        "job.yaml:3",
        "job.yaml:3",
        "job.yaml:4",
        "job.yaml:6",
        "job.yaml:6",
        "job.yaml:6",
        "job.yaml:7",
    ]


def test_a_job_without_species_is_refused(faults: Faults) -> None:
    assert faults("temperatures: [300, 400, 500]\n") == (
        "job.yaml: species: there are no species\n    Add them under 'species:'."
    )


def test_empty_sections_are_no_fault(load: Load) -> None:
    job = load("temperatures: [300, 400, 500]\nspecies: {H: {energy: h.out}}\ntransition_states:\nreactions:\n")
    assert job.reactions == ()


def test_codes_and_limits_are_not_checked_where_none_are_known(load: Load) -> None:
    load()
    text = Path("job.yaml").read_text(encoding="utf-8").replace("soft-mode", "anything")
    Path("job.yaml").write_text(text, encoding="utf-8")
    assert load_job("job.yaml").audit_severities == (("anything", "note"),)


def test_a_job_error_comes_back_from_a_worker_whole(load: Load) -> None:
    with pytest.raises(JobError) as caught:
        load("temperatures: 3\n")
    again = pickle.loads(pickle.dumps(caught.value))  # what a process pool does
    assert (again.problems, str(again)) == (caught.value.problems, str(caught.value))


def test_a_message_is_fit_for_a_terminal(faults: Faults) -> None:
    text = faults('temperatures: [300, 400, 500]\nspecies:\n  "\\e[31mred": {energy: h.out}\n')
    assert "\x1b" not in text
    assert len(faults(f"temperatures: [{'9' * 100_000}]\n")) < 1000
