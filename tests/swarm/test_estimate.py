"""Estimates: how they are written, and whether jackknife errors are honest."""

import math

import numpy as np
import pytest
from scipy import stats

from swarmgauge.swarm.estimate import Estimate, jackknife, with_error


@pytest.mark.parametrize(
    ("value", "error", "text"),
    [
        (104200.0, 300.0, "1.042(3)e5"),
        (104200.0, 150.0, "1.0420(15)e5"),
        (-104200.0, 3000.0, "-1.04(3)e5"),
        (5.0, 0.2, "5.0(2)"),
        (0.0123, 0.0002, "1.23(2)e-2"),
        (0.0, 0.02, "0(2)e-2"),
        (0.001, 0.02, "0(2)e-2"),
        (9.999e-14, 2e-17, "9.999(2)e-14"),
        (1.0, 0.0, "1"),
        (1.0, math.nan, "1"),
        (123456.0, math.inf, "1.235e+05"),
        (math.nan, 1.0, "nan"),
    ],
)
def test_values_with_errors(value, error, text):
    assert with_error(value, error) == text


@pytest.mark.parametrize("exponent", range(-25, 26, 5))
def test_a_written_value_can_be_read_back(exponent):
    rng = np.random.default_rng(exponent + 100)
    for _ in range(200):
        value = rng.normal() * 10.0**exponent
        error = 10.0 ** rng.uniform(-6, 1) * 10.0**exponent
        text = with_error(value, error)
        mantissa, rest = text.split("(")
        digits, _, power = rest.partition(")")
        power = float("1" + power) if power else 1.0
        place = len(mantissa.partition(".")[2])
        assert abs(float(mantissa) * power - value) <= 0.51 * 10.0**-place * power
        assert int(digits) * 10.0**-place * power == pytest.approx(error, rel=0.26)
        assert 1 <= int(digits) <= 99


def test_repr_of_estimates():
    assert repr(Estimate(104200.0, 300.0, "m/s", 20)) == "1.042(3)e5 m/s"
    assert repr(Estimate(0.0, math.nan, "m^3/s", 20, 3.2e-20)) == "< 3.2e-20 m^3/s (95 %)"


def test_jackknife_of_a_mean_is_its_standard_error():
    rows = np.random.default_rng(1).normal(5.0, 2.0, size=(37, 3))
    values, errors = jackknife(lambda sums: sums, rows)[:2]
    np.testing.assert_allclose(values, rows.mean(axis=0), rtol=1e-12)
    np.testing.assert_allclose(errors, rows.std(axis=0, ddof=1) / 37**0.5, rtol=1e-12)


def ratio(sums):
    return (sums[:, 0] / sums[:, 1])[:, None]


def test_jackknife_of_a_ratio_against_the_delta_method():
    rng = np.random.default_rng(2)
    time = rng.normal(100.0, 10.0, size=4000)
    rows = np.stack([3.0 * time + rng.normal(0.0, 5.0, size=4000), time], axis=1)
    values, errors = (float(np.ravel(part)[0]) for part in jackknife(ratio, rows)[:2])
    r = rows[:, 0].mean() / rows[:, 1].mean()
    assert values == pytest.approx(r, rel=1e-12)  # never a mean of ratios
    residual = rows[:, 0] - r * rows[:, 1]
    assert errors == pytest.approx(residual.std(ddof=1) / rows[:, 1].mean() / 4000**0.5, rel=2e-3)


@pytest.mark.parametrize("count", [20, 80])
def test_coverage_on_ratios(count):
    # Student's t with count - 1: some 67 and 94 % within 1 and 2 errors; binomial errors of the trials 0.7 and 0.4 %.
    rng = np.random.default_rng(3)
    trials = 4000
    off = np.empty(trials)
    for trial in range(trials):
        time = rng.gamma(50.0, 2.0, size=count)
        rows = np.stack([rng.poisson(0.4 * time), time], axis=1).astype(float)
        value, error = (float(np.ravel(part)[0]) for part in jackknife(ratio, rows)[:2])
        off[trial] = (value - 0.4) / error
    for reach in (1.0, 2.0, 3.0):
        expected = 1 - 2 * stats.t.sf(reach, count - 1)
        inside = np.count_nonzero(abs(off) < reach) / trials
        assert inside == pytest.approx(expected, abs=3.5 * math.sqrt(expected * (1 - expected) / trials) + 0.002)


def test_the_order_of_cohorts_does_not_matter():
    rows = np.random.default_rng(4).lognormal(0.0, 5.0, size=(40, 2))
    first = jackknife(ratio, rows)[:2]
    second = jackknife(ratio, rows[::-1])[:2]
    assert first[0] == second[0]
    assert first[1] == second[1]
