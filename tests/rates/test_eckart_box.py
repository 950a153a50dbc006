"""The accuracy that is claimed for the Eckart integral, over the whole box it is claimed for.

The values were made once by tests/reference/make_eckart_box.py, with other variables, panels and arithmetic.
"""

from pathlib import Path

import numpy as np
import pytest
import yaml
from scipy.constants import N_A, c, centi, h, kilo

from rateloom.rates import TUNNELLING_MODELS, Barrier

BOX = yaml.safe_load((Path(__file__).parents[1] / "reference" / "eckart_box.yaml").read_text(encoding="utf-8"))
POINTS = [pytest.param(entry, id=entry["id"]) for entry in BOX["entries"]]
CLAIMED = 1e-9  # in the docstring of eckart; the values agree as well with themselves


def barrier_of(inputs: dict[str, float], *, swapped: bool = False) -> Barrier:
    forward, reverse = (inputs[f"barrier_{way}_kJ_per_mol"] * kilo / N_A for way in ("forward", "reverse"))
    if swapped:
        forward, reverse = reverse, forward
    return Barrier(forward, reverse, inputs["imaginary_frequency_per_cm"] * c / centi)


@pytest.mark.parametrize("entry", POINTS)
def test_eckart_integral_is_as_good_as_claimed(entry: dict) -> None:
    temperature = np.array([entry["inputs"]["temperature_K"]])

    value = TUNNELLING_MODELS["eckart"](barrier_of(entry["inputs"]), temperature).log_factors[0]

    assert value == pytest.approx(entry["value"], abs=CLAIMED, rel=0)


@pytest.mark.parametrize("entry", POINTS)
def test_it_is_as_good_from_the_other_side_and_on_a_wide_grid(entry: dict) -> None:
    grid = np.array([100.0, entry["inputs"]["temperature_K"], 3000.0])  # panels are placed for the hottest

    value = TUNNELLING_MODELS["eckart"](barrier_of(entry["inputs"], swapped=True), grid).log_factors[1]

    assert value == pytest.approx(entry["value"], abs=CLAIMED, rel=0)


def test_the_box_has_points_of_every_kind() -> None:
    inputs = [entry["inputs"] for entry in BOX["entries"]]
    forward, reverse, wavenumbers, temperatures = np.array([list(point.values()) for point in inputs]).T

    assert (forward.min(), forward.max(), reverse.min(), reverse.max()) == (1.0, 400.0, 1.0, 400.0)
    assert wavenumbers.max() == 3000.0
    assert temperatures.min() == 100.0
    assert np.any(forward > 5 * reverse)
    assert np.any(reverse > 5 * forward)
    # barriers so thin that the constant term of the probability is a cosine: alpha1 alpha2 below pi^2/4
    alphas = [2 * np.pi * side * kilo / N_A / (h * wavenumbers * c / centi) for side in (forward, reverse)]
    assert np.any(alphas[0] * alphas[1] < np.pi**2 / 4)
