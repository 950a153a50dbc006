"""The command line as a user meets it: exit statuses, where text goes, and no traceback whatever happens."""

import json
import subprocess
import sys
from collections.abc import Sequence
from pathlib import Path

import pytest

from rateloom.cli import main


def test_help_and_version_load_no_physics() -> None:
    program = (
        "import sys\n"
        "from rateloom.cli import main\n"
        "try: main(['--help'])\n"
        "except SystemExit: pass\n"
        "print(sorted({'numpy', 'scipy', 'cclib', 'pydantic', 'networkx'} & set(sys.modules)))\n"
    )
    done = subprocess.run([sys.executable, "-c", program], capture_output=True, text=True, check=True)

    assert done.stdout.splitlines()[-1] == "[]"
    assert "rateloom" in done.stdout


def test_a_job_file_that_is_not_there_is_status_2_with_one_message(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert main(["run", str(tmp_path / "none.yaml")]) == 2

    out, err = capsys.readouterr()
    assert out == ""
    assert "none.yaml" in err
    assert "Traceback" not in err


def test_all_problems_of_a_job_file_are_reported_at_once(job: Path, capsys: pytest.CaptureFixture[str]) -> None:
    text = job.read_text().replace("transition_state: ts-ch4-h}", "transition_state: ts-ch4-0}")
    job.write_text(text.replace("temperatures:", "temperature:"))

    assert main(["plan", str(job)]) == 2

    err = capsys.readouterr().err
    assert "job.yaml:4: temperature" in err
    assert "ts-ch4-0" in err
    assert "'ts-ch4-h' (line 12)" in err


def test_run_then_plan_then_audit(job: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["run", str(job), "--workers", "1"]) == 0
    assert "Delivered 2 of 2 reactions" in capsys.readouterr().out
    assert main(["plan", str(job)]) == 0
    assert "Nothing to compute" in capsys.readouterr().out
    tables = {path.name: path.read_bytes() for path in (job.parent / "tables").glob("*.csv")}

    assert main(["audit", str(job), "--json", "--workers", "1"]) == 0

    findings = json.loads(capsys.readouterr().out)
    assert {"subject_kind", "subject", "finding", "severity", "value", "limit", "message", "accepted_because"} == set(
        findings[0]
    )
    assert {path.name: path.read_bytes() for path in (job.parent / "tables").glob("*.csv")} == tables


@pytest.mark.parametrize(("options", "status"), [((), 0), (("--fail-on", "note"), 1)])
def test_audit_fails_on_the_severity_asked_for(job: Path, options: Sequence[str], status: int) -> None:
    job.write_text(job.read_text().replace("CH4: {", "CH4: {symmetry_number: 24, "))

    assert main(["audit", str(job), "--workers", "1", *options]) == status


def test_audit_shows_one_code_alone(job: Path, capsys: pytest.CaptureFixture[str]) -> None:
    job.write_text(job.read_text().replace("CH4: {", "CH4: {symmetry_number: 24, "))

    main(["audit", str(job), "--workers", "1", "--json", "--only", "symmetry-number-differs"])

    assert [finding["subject"] for finding in json.loads(capsys.readouterr().out)] == ["CH4"]


def test_a_code_that_does_not_exist_is_named_with_the_closest(job: Path, capsys: pytest.CaptureFixture[str]) -> None:
    assert main(["audit", str(job), "--only", "symetry-number-differs"]) == 2

    assert "symmetry-number-differs" in capsys.readouterr().err


def test_withheld_reactions_are_status_1(job: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (job.parent / "calculations" / "ts_ch4_h.out.gz").unlink()

    assert main(["run", str(job), "--workers", "1"]) == 1

    out = capsys.readouterr().out
    assert "Delivered 1 of 2 reactions" in out
    assert "ch4-h: ts-ch4-h: calculation-not-readable" in out


def test_an_output_folder_that_is_a_file_is_a_message(job: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (job.parent / "tables").write_text("not a folder")

    assert main(["run", str(job)]) == 2

    err = capsys.readouterr().err
    assert "tables" in err
    assert "--output" in err


def test_a_fault_of_the_program_is_status_3_and_no_traceback(
    job: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch, tmp_path: Path
) -> None:
    monkeypatch.setattr("rateloom.batch.run.graph_of", lambda _job, **_options: 1 / 0)
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))

    assert main(["run", str(job)]) == 3

    err = capsys.readouterr().err
    assert "A fault of the program: ZeroDivisionError" in err
    assert "Traceback" not in err
    assert "ZeroDivisionError" in Path(err.split()[-1]).read_text()
