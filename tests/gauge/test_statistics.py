"""Chi-squared against scipy, runs against counting all orders."""

from fractions import Fraction
from itertools import combinations

import pytest
from scipy.stats import chi2

from swarmgauge.gauge.statistics import chi_squared_probability, one_sign_probability, runs_of, runs_probability


@pytest.mark.parametrize(("value", "count"), [(0.0, 1), (3.84, 1), (7.2, 5), (60.0, 20)])
def test_chi_squared(value, count):
    assert chi_squared_probability(value, count) == pytest.approx(chi2.sf(value, count), rel=1e-12)


def test_chi_squared_as_printed_in_tables():
    # the 5 % and 1 % points of every table of chi-squared (common practice)
    assert chi_squared_probability(18.307, 10) == pytest.approx(0.05, abs=1e-5)
    assert chi_squared_probability(6.635, 1) == pytest.approx(0.01, abs=1e-5)


@pytest.mark.parametrize("above", range(7))
@pytest.mark.parametrize("below", range(7))
def test_runs_by_counting_all_orders(above, below):
    count = above + below
    if count == 0:
        return
    orders = [[place in chosen for place in range(count)] for chosen in combinations(range(count), above)]
    found = [runs_of(signs) for signs in orders]
    for runs in range(1, count + 1):
        expected = Fraction(sum(number <= runs for number in found), len(orders))
        assert runs_probability(runs, above, below) == pytest.approx(float(expected), rel=1e-14)


def test_runs_as_printed_in_tables():
    # F. S. Swed and C. Eisenhart, Ann. Math. Stat. 14, 66 (1943), from memory: at 10 and 10, 6 runs or fewer happen in
    # at most 2.5 % of the cases, 7 or fewer do not.
    assert runs_probability(6, 10, 10) < 0.025 < runs_probability(7, 10, 10)


def test_one_sign():
    assert one_sign_probability(5) == 2 / 2**5
