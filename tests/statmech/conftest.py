"""Published numbers that several tests of this room use."""

from collections.abc import Callable
from pathlib import Path

import pytest
import yaml


@pytest.fixture(scope="session")
def thermal() -> Callable[[str], float]:
    """Published value by the id of its entry."""
    file = Path(__file__).parents[1] / "reference" / "thermal_arithmetic.yaml"
    values = {entry["id"]: entry["value"] for entry in yaml.safe_load(file.read_text())["entries"]}
    return values.__getitem__
