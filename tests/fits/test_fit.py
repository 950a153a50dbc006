"""Fitted rate expressions: parameters recovered, deviations told, hopeless input answered with a remark."""

from pathlib import Path

import numpy as np
import pytest
import yaml
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.constants import R

from rateloom.fits import Term, activation_energy, fit_rates, log_rate

ENTRIES = yaml.safe_load((Path(__file__).parents[1] / "reference" / "rate_expressions.yaml").read_text())["entries"]
ONE_TERM = [entry for entry in ENTRIES if len(entry["inputs"]["terms"]) == 1]
GRID = 1 / np.linspace(1 / 300, 1 / 2500, 45)


def terms_of(entry: dict) -> tuple[tuple[Term, ...], float]:
    terms = entry["inputs"]["terms"]
    return tuple(Term(t["A"], t["n"], t["E_over_R_K"] * R) for t in terms), terms[0]["T_ref_K"]


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in ENTRIES])
def test_published_expressions_give_their_published_values(entry: dict) -> None:
    terms, reference = terms_of(entry)

    value = np.exp(log_rate(terms, np.array([entry["inputs"]["temperature_K"]]), reference))[0]

    assert value == pytest.approx(entry["value"], rel=entry["arithmetic_tolerance"]["size"])


@pytest.mark.parametrize("entry", [pytest.param(entry, id=entry["id"]) for entry in ONE_TERM])
def test_published_expressions_are_recovered(entry: dict) -> None:
    (term,), reference = terms_of(entry)

    fit = fit_rates(GRID, log_rate((term,), GRID, reference), reference_temperature=reference)

    (found,) = fit.terms
    # rounding of ln k, 1e-14, over the conditioning of three parameters on this range
    assert found.n == pytest.approx(term.n, abs=1e-9)
    assert pytest.approx(term.E, abs=1e-5) == found.E
    assert pytest.approx(term.A, rel=1e-8) == found.A
    assert fit.max_deviation < 1e-10
    assert fit.remarks == ()


@settings(max_examples=50, deadline=None)
@given(
    log_A=st.floats(min_value=-60.0, max_value=30.0),
    n=st.floats(min_value=-5.0, max_value=5.0),
    E=st.floats(min_value=-2.0e4, max_value=4.0e5),
    reference=st.sampled_from([1.0, 298.15, 1000.0]),
)
def test_any_parameters_are_recovered(log_A: float, n: float, E: float, reference: float) -> None:
    term = Term(float(np.exp(log_A)), n, E)

    fit = fit_rates(GRID, log_rate((term,), GRID, reference), reference_temperature=reference)

    (found,) = fit.terms
    assert found.n == pytest.approx(n, abs=1e-8)
    assert pytest.approx(E, abs=1e-4) == found.E
    assert pytest.approx(term.A, rel=1e-7) == found.A
    assert fit.activation_temperature == pytest.approx(2 / (1 / 300 + 1 / 2500))
    assert fit.activation_energy == pytest.approx(E + n * R * fit.activation_temperature, abs=1e-3)


def test_narrow_range_keeps_its_digits() -> None:
    term, grid = Term(1e-17, 2.0, 5.0e4), np.array([295.0, 298.0, 301.0, 305.0])

    fit = fit_rates(grid, log_rate((term,), grid, 298.15), reference_temperature=298.15)

    assert fit.max_deviation < 1e-10
    assert fit.terms[0].n == pytest.approx(2.0, abs=1e-6)  # conditioning: (T/spread)^2, some 1e4, times rounding


def test_reference_temperature_changes_the_prefactor_alone() -> None:
    log_rates = log_rate((Term(1e-12, 0.0, 2e4), Term(1e-10, 0.0, 8e4)), GRID, 1.0)

    one, other = (fit_rates(GRID, log_rates, reference_temperature=t) for t in (1.0, 1000.0))

    assert one.terms[0].n == pytest.approx(other.terms[0].n, rel=1e-12)
    assert one.max_deviation == pytest.approx(other.max_deviation, rel=1e-6)
    assert pytest.approx(one.terms[0].A * 1000.0 ** one.terms[0].n, rel=1e-9) == other.terms[0].A


def test_poor_fit_is_told_with_its_largest_deviation() -> None:
    bent = log_rate((Term(1e-16, 0.0, 5e3), Term(1e-10, 0.0, 8e4)), GRID, 1.0)

    fit = fit_rates(GRID, bent, tolerance=0.05)

    deviations = np.exp(log_rate(fit.terms, GRID, 1.0) - bent) - 1
    assert fit.max_deviation == pytest.approx(np.abs(deviations).max())
    assert fit.rms_deviation == pytest.approx(np.sqrt(np.mean(deviations**2)))
    (remark,) = fit.remarks
    assert remark.code == "poor-fit"
    assert remark.limit == "5 %"
    assert fit_rates(GRID, bent, tolerance=100.0).remarks == ()


def test_least_squares_is_a_minimum() -> None:
    bent = log_rate((Term(1e-16, 0.0, 5e3), Term(1e-10, 0.0, 8e4)), GRID, 1.0)
    (best,) = fit_rates(GRID, bent).terms

    def residual(log_scale: float, dn: float, dE: float) -> float:
        term = Term(best.A * float(np.exp(log_scale)), best.n + dn, best.E + dE)
        return float(((log_rate((term,), GRID, 1.0) - bent) ** 2).sum())

    least = residual(0, 0, 0)
    for step in np.vstack([np.diag([1e-3, 1e-4, 1.0]), -np.diag([1e-3, 1e-4, 1.0])]):
        assert residual(*step) > least


def test_fewer_than_three_temperatures_give_no_terms() -> None:
    fit = fit_rates(np.array([300.0, 400.0, 400.0]), np.array([-30.0, -28.0, -28.0]))

    assert fit.terms == ()
    assert [remark.code for remark in fit.remarks] == ["too-few-temperatures"]


def test_temperatures_without_a_rate_are_left_out_and_told() -> None:
    term = Term(1e-17, 2.0, 5.0e4)
    log_rates = log_rate((term,), GRID, 1.0)
    log_rates[0] = -np.inf

    fit = fit_rates(GRID, log_rates)

    assert fit.lowest_temperature == GRID[1]
    assert [remark.code for remark in fit.remarks] == ["temperatures-not-fitted"]
    assert fit.terms[0].n == pytest.approx(2.0, abs=1e-8)


def test_prefactor_beyond_a_double_is_told() -> None:
    fit = fit_rates(GRID, log_rate((Term(1e-10, -150.0, 1.0e5),), GRID, 1000.0), reference_temperature=1.0)

    assert fit.terms == ()
    assert [remark.code for remark in fit.remarks] == ["prefactor-out-of-range"]


def test_activation_energy_is_the_slope_of_the_sum_of_terms() -> None:
    terms = (Term(1e-16, 1.0, 5e3), Term(1e-10, 0.5, 8e4))
    step = 1e-3
    low, high = log_rate(terms, np.array([1000.0 - step, 1000.0 + step]), 1.0)

    # central difference: error of order step^2, rounding 1e-11
    slope = R * 1000.0**2 * (high - low) / (2 * step)
    assert activation_energy(terms, 1000.0, 1.0) == pytest.approx(slope, rel=1e-7)
