"""Fixtures of the engine's tests: a toy job that worker processes can import, a file system that is soon full."""

import os
import subprocess
from collections.abc import Callable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from rateloom.engine import Evaluation

if TYPE_CHECKING:
    from toy_job import Toy

HERE = Path(__file__).parent


@pytest.fixture(autouse=True)
def toys(monkeypatch: pytest.MonkeyPatch, tmp_path: Path) -> Path:
    """Let this process and its workers import ``toy_stages``; give the folder of their diary."""
    monkeypatch.syspath_prepend(str(HERE))
    monkeypatch.setenv("PYTHONPATH", os.pathsep.join(filter(None, [str(HERE), os.environ.get("PYTHONPATH", "")])))
    diary = tmp_path / "diary"
    diary.mkdir()
    monkeypatch.setenv("TOY_DIARY", str(diary))
    return diary


@pytest.fixture
def toy(tmp_path: Path, toys: Path) -> "Toy":
    """An empty toy job."""
    from toy_job import Toy

    folder = tmp_path / "job"
    folder.mkdir()
    return Toy(folder, toys)


@pytest.fixture
def computed() -> Callable[[Evaluation], list[str]]:
    """Names of the nodes that an evaluation computed."""
    return lambda evaluation: sorted(n for n, s in evaluation.status.items() if s.value == "computed")


@pytest.fixture
def small_disk(tmp_path: Path) -> Iterator[Path]:
    """A file system of 1 MB; skips where it cannot be mounted."""
    folder = tmp_path / "small"
    folder.mkdir()
    command = ["mount", "-t", "tmpfs", "-o", "size=1m", "rateloom-test", str(folder)]
    try:
        mounted = subprocess.run(command, capture_output=True, check=False).returncode == 0
    except OSError:
        mounted = False
    if not mounted:
        pytest.skip("a small file system cannot be mounted here")
    yield folder
    subprocess.run(["umount", "-l", str(folder)], check=True)
