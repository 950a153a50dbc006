"""Shared fixtures: where the demo's outputs and, where they are at hand, the outputs of many programs lie."""

from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]


@pytest.fixture(scope="session")
def calculations() -> Path:
    """Folder of the demo's real outputs."""
    return ROOT / "sample_outputs" / "calculations"


@pytest.fixture(scope="session")
def many_outputs() -> Path:
    """Folder of real outputs of many programs, beside the checkout; skips where it is absent."""
    folder = ROOT.parent / "shared" / "outputs"
    if not folder.is_dir():
        pytest.skip("the outputs of many programs (../shared/outputs) are not on this machine")
    return folder
