"""Upper bounds of what was never seen."""

import math

import numpy as np
import pytest
from kernel.model_gases import HELIUM_U, model, power_law
from scipy import stats

from swarm.swarms import cohorts, swarm
from swarmgauge.gas import Process
from swarmgauge.gas.laws import Ramp
from swarmgauge.swarm.bounds import bound_of_few
from swarmgauge.swarm.plan import RATE_UNIT, solved
from swarmgauge.swarm.point_run import estimates_of

PER_EVENT = -math.log(0.05)  # Poisson, 95 %


def test_a_process_that_ends_its_excursions_is_counted_by_events(seed):
    far = power_law("ionization", 1e-20, threshold_eV=500.0)
    mixture = model(HELIUM_U, power_law("elastic", 6e-20), power_law("excitation", 1e-20, threshold_eV=2.0), far)
    reducer, rows = cohorts(mixture, 20.0, seed, 4)
    estimates = estimates_of(reducer, rows)[0]
    estimate = estimates["rate:model/ionization"]
    assert estimate.value == 0.0
    assert np.isnan(estimate.standard_error)
    time = rows[:, reducer.layout.slices["time"]].sum()
    assert estimate.upper_bound == pytest.approx(PER_EVENT * RATE_UNIT / time, rel=1e-12)
    assert estimate.interval() == (0.0, estimate.upper_bound)
    net = estimates["net_frequency_over_N"]
    assert net.value == 0.0
    assert net.interval() == (-net.upper_bound, net.upper_bound)  # unseen, so of unknown sign


def test_electrons_come_to_a_passive_process_in_excursions(seed):
    # Hard spheres of helium's mass without a temperature: above its onset, where nothing takes much energy, an electron
    # stays for hundreds of collisions. Half of the cohorts see nothing, and the bound of each must be above the truth,
    # by two-term (exact to m/M here); three unseen candidates instead of three excursions would say less.
    seen = power_law("excitation", 6e-20, threshold_eV=0.85, name="seen", passive=True)
    mixture = model(HELIUM_U, power_law("elastic", 6e-20), seen)
    reducer, rows = cohorts(mixture, 0.3, seed, 30)
    truth = solved(mixture, reducer.plan.field).values["rate:model/seen"]
    unseen = 0
    for row in rows:
        estimate = estimates_of(reducer, np.stack([row, row]))[0]["rate:model/seen"]
        if estimate.value == 0.0:
            unseen += 1
            assert 2.0 * estimate.upper_bound > truth  # two times the same cohort
            time = row[reducer.layout.slices["time"]][0]
            assert PER_EVENT * RATE_UNIT / time < 1.1 * truth
    assert 5 <= unseen <= 25


def test_a_few_excursions_make_a_bound_and_no_error_bar():
    # The same gas with the onset at 0.92 eV: one of 20 cohorts comes there and sees a fortieth of the truth, with a
    # scatter no larger than itself. Such a rate is bounded.
    seen = power_law("excitation", 6e-20, threshold_eV=0.92, name="seen", passive=True)
    mixture = model(HELIUM_U, power_law("elastic", 6e-20), seen)
    reducer, rows = cohorts(mixture, 0.3, 2, 20)
    truth = solved(mixture, reducer.plan.field).values["rate:model/seen"]
    estimate = estimates_of(reducer, rows)[0]["rate:model/seen"]
    assert 0.0 < estimate.value < 0.3 * truth
    assert math.isnan(estimate.standard_error)
    assert estimate.upper_bound > truth
    assert estimate.interval() == (0.0, estimate.upper_bound)


@pytest.mark.parametrize("seen", [1, 4, 11, 16])
def test_bounds_of_a_few(seen):
    # Poisson: half the 95 % point of chi-squared with 2 n + 2 degrees of freedom.
    expected = stats.chi2(2 * seen + 2).ppf(0.95) / 2.0
    assert bound_of_few(PER_EVENT, seen**-0.5 * (1 + 1e-9)) == pytest.approx(expected, rel=1e-4)


def test_a_net_frequency_with_attachment_alone_is_bounded_on_both_sides(seed):
    capture = Process("capture", "attachment", 500.0, Ramp(500.0, 1e-22))
    mixture = model(HELIUM_U, power_law("elastic", 6e-20), power_law("excitation", 1e-20, threshold_eV=2.0), capture)
    net = swarm(mixture, 20.0, seed, 4)[0]["net_frequency_over_N"]
    assert net.value == 0.0
    assert net.interval()[0] == -net.upper_bound < 0.0
    assert repr(net).startswith("|x| < ")
