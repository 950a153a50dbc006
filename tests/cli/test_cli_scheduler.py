"""The option ``--scheduler``: what is refused, and what is told where the cluster cannot be used."""

import sys
from pathlib import Path

import pytest

from rateloom.cli import main

JOB = """\
temperatures: [300, 500, 1000]
species:
  H: {given: {energy: -0.5 hartree, geometry: [[H, 0, 0, 0]], multiplicity: 2, charge: 0}}
"""


@pytest.fixture
def job(tmp_path: Path) -> str:
    file = tmp_path / "job.yaml"
    file.write_text(JOB, encoding="utf-8")
    return str(file)


@pytest.mark.parametrize("command", ["run", "audit"])
@pytest.mark.parametrize(
    "address", ["node7:8786", "tcp://node7", "tcp://:8786", "tcp://node7:port", "tcp://node7:8786/x", "http://a:1"]
)
def test_what_is_no_address_is_refused(command: str, address: str, capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit) as stop:
        main([command, "job.yaml", "--scheduler", address])

    assert stop.value.code == 2
    assert f"'{address}' is not an address such as tcp://node7:8786" in capsys.readouterr().err


def test_workers_of_two_kinds_are_refused(capsys: pytest.CaptureFixture[str]) -> None:
    with pytest.raises(SystemExit):
        main(["run", "job.yaml", "--scheduler", "tls://[::1]:8786", "--workers", "2"])

    assert "--workers: not allowed with argument --scheduler" in capsys.readouterr().err


@pytest.mark.parametrize("command", ["run", "audit"])
def test_a_scheduler_that_is_not_there_is_told(
    command: str, job: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    pytest.importorskip("distributed", reason="the extra 'cluster' is not installed")
    monkeypatch.setattr("rateloom.engine.cluster.CONNECT_SECONDS", 0.5)

    status = main([command, job, "--scheduler", "tcp://127.0.0.1:9"])

    assert status == 2
    assert "the Dask scheduler tcp://127.0.0.1:9 cannot be reached" in capsys.readouterr().err


@pytest.mark.parametrize("command", ["run", "audit"])
def test_a_missing_package_is_told(
    command: str, job: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setitem(sys.modules, "distributed", None)

    status = main([command, job, "--scheduler", "tcp://127.0.0.1:9"])

    assert status == 2
    assert "pip install 'rateloom[cluster]'" in capsys.readouterr().err
