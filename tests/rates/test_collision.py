"""Hard-sphere collisions against worked numbers."""

from pathlib import Path

import numpy as np
import pytest
import yaml
from scipy.constants import N_A, angstrom, centi, kilo

from rateloom.rates import hard_sphere_rate_coefficient, mean_relative_speed

ENTRIES = yaml.safe_load((Path(__file__).parents[1] / "reference" / "hard_spheres.yaml").read_text())["entries"]


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in ENTRIES])
def test_worked_numbers(entry: dict) -> None:
    inputs = entry["inputs"]
    a, b = (inputs[name] / kilo / N_A for name in ("mass_A_g_per_mol", "mass_B_g_per_mol"))
    reduced, temperature = a * b / (a + b), np.array([inputs["temperature_K"]])
    if entry["unit"] == "m/s":
        value = mean_relative_speed(reduced, temperature)[0]
    else:
        diameter = inputs["diameter_angstrom"] * angstrom
        value = hard_sphere_rate_coefficient(reduced, diameter, temperature)[0] / centi**3

    assert value == pytest.approx(entry["value"], rel=entry["tolerance"]["size"])


def test_senseless_partners_are_refused() -> None:
    with pytest.raises(ValueError, match="mass"):
        mean_relative_speed(0.0, np.array([300.0]))
    with pytest.raises(ValueError, match="diameter"):
        hard_sphere_rate_coefficient(1e-26, -1.0, np.array([300.0]))
