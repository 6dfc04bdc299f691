"""Verdicts on data with planted offsets."""

import math

import pytest
from scipy.stats import chi2

from gauge.conftest import RUN, drifts
from swarmgauge.campaign import open_results
from swarmgauge.campaign.measured import read_measured
from swarmgauge.gauge.comparison import compare
from swarmgauge.gauge.verdict import ALL, verdicts

FIELDS = [12.0, 25.0, 47.0, 80.0, 110.0, 200.0, 350.0, 600.0]
ONE_SET = RUN.replace('{ "nitrogen-schmalzried2023" = 1.0 }', "").replace("[293, 400]", "293")


@pytest.fixture
def verdict_of(results_of):
    def verdict(*rows):
        folder = results_of(*rows, text=ONE_SET)
        return verdicts(compare(open_results(folder), read_measured(folder / "measured.csv")))

    return verdict


def test_agreement(verdict_of):
    signs = [0.01, -0.01, 0.005, 0.01, -0.01, -0.002, 0.01, -0.01]
    whole, *decades = verdict_of(*drifts(FIELDS, off=signs))
    assert (whole.decade, whole.count, whole.trend) == (ALL, 8, "none")
    assert whole.words.startswith("agrees (")
    assert [(part.decade, part.count) for part in decades] == [("10 to 100", 4), ("100 to 1000", 4)]
    assert math.fsum(part.chi_squared for part in decades) == pytest.approx(whole.chi_squared, rel=1e-12)
    assert whole.probability == pytest.approx(chi2.sf(whole.chi_squared, 8), rel=1e-12)


def test_an_offset_within_the_errors_is_seen_as_a_trend(verdict_of):
    whole = verdict_of(*drifts(FIELDS, off=0.015))[0]
    assert whole.trend == "high"
    assert whole.words == "agrees within its errors, but +1.5 % throughout"


def test_an_offset_beyond_the_errors_disagrees(verdict_of):
    whole = verdict_of(*drifts(FIELDS, off=-0.1))[0]
    assert (whole.trend, whole.probability < 1e-6) == ("low", True)
    assert whole.words.startswith("disagrees -10 % throughout; worst at ")
    assert whole.deviation == pytest.approx(-0.1, abs=1e-3)


def test_an_offset_that_may_be_common_to_all_data_is_told_so(verdict_of):
    fields = [*FIELDS, *(1.1 * field for field in FIELDS)]
    whole = verdict_of(*drifts(fields, off=0.032))[0]
    assert (whole.trend, whole.probability < 0.05) == ("high", True)
    assert whole.words == "doubtful: +3.2 % throughout, 1.6 standard errors; agrees if these are common to all data"


def test_a_turn_is_told_with_its_place(verdict_of):
    whole = verdict_of(*drifts(FIELDS, off=[-0.03] * 4 + [0.03] * 4))[0]
    # 2 runs of 4 and 4: 2 of 70 orders
    assert (whole.runs, whole.runs_probability) == (2, pytest.approx(2 / 70))
    assert whole.trend == "turns"
    assert "-3 % below 110 Td, +3 % from there on" in whole.words


def test_one_bad_value_is_named(verdict_of):
    off = [0.01, -0.01, 0.01, -0.01, 0.2, -0.01, 0.01, -0.01]
    whole = verdict_of(*drifts(FIELDS, off=off))[0]
    assert whole.words.startswith("disagrees; worst at 110 Td: +20 %, ")


def test_computed_errors_that_hide_everything_are_told(verdict_of):
    whole = verdict_of(*drifts(FIELDS, uncertainty=0.001))[0]
    assert whole.words.startswith("undecided: the computed errors exceed those of the measurement")


def test_a_single_value(verdict_of):
    whole = verdict_of(*drifts([110.0], off=0.01))[0]
    assert (whole.trend, whole.words) == ("few", "agrees (+1 % at 110 Td)")


def test_verdicts_of_right_errors_are_seldom_bad(results_of):
    # Ideal data about the curve, from a table of normal quantiles in shuffled order (no random numbers): chi2/n near 1.
    from scipy.stats import norm

    quantiles = norm.ppf([(k + 0.5) / 8 for k in (3, 6, 1, 4, 0, 7, 2, 5)])
    folder = results_of(*drifts(FIELDS, off=[0.02 * float(q) for q in quantiles]), text=ONE_SET)
    whole = verdicts(compare(open_results(folder), read_measured(folder / "measured.csv")))[0]
    assert 0.5 < whole.reduced < 1.2
    assert whole.words.startswith("agrees")
