"""Coupled runs: differences agree with those of independent runs, with smaller errors."""

import math

import pytest
from kernel.model_gases import ELECTRON_U, constant_frequency, model

import swarmgauge as sg
from swarmgauge.gas import InputError
from swarmgauge.swarm.difference import coupled_plans
from swarmgauge.swarm.plan import MOST_LAGS, first_plan, solved


def test_equal_swarms_have_no_difference(seed):
    mixture = sg.Mixture({"model-ramp": 1.0})
    difference = sg.simulate_difference(mixture, mixture, sg.Field(12.0), seed=seed, cohorts=20)
    assert all(estimate.value == 0.0 for estimate in difference.estimates.values())


def test_a_temperature_step_in_constant_collision_frequency(seed):
    # Wannier's relation (Bell Syst. Tech. J. 32, 170 (1953)): at constant collision frequency the mean energy exceeds
    # that of the cold gas by exactly 3/2 kT, and the drift does not change; at any mass of the atoms.
    gas = constant_frequency("elastic", 1e-13)
    cold, warm = (model(100 * ELECTRON_U, gas, temperature_K=t) for t in (300.0, 330.0))
    difference = sg.simulate_difference(cold, warm, sg.Field(1.0), seed=seed, cohorts=20)
    exact = 1.5 * 30.0 * 8.617333262e-5
    energy = difference["mean_energy"]
    assert abs(energy.value - exact) < 3 * energy.standard_error
    assert energy.standard_error < 0.01 * exact
    assert difference.gains["mean_energy"] > 50  # independent runs of this length would not see the difference
    drift = difference["drift_velocity_flux"]
    assert abs(drift.value) < 3 * drift.standard_error


@pytest.mark.slow
def test_the_gain_is_what_it_says(seed):
    first, second = (sg.Mixture({"argon-yamabe1983": x, "nitrogen-phelps1985": 1 - x}) for x in (0.2, 0.19))
    field = sg.Field(100.0)
    coupled = sg.simulate_difference(first, second, field, seed=seed)
    apart = [sg.simulate(mixture, field, accuracy={"mean_energy": 0.002}, seed=seed) for mixture in (first, second)]
    for name in ("drift_velocity_flux", "mean_energy"):
        independent = apart[1][name].value - apart[0][name].value
        error = math.hypot(*(point[name].standard_error for point in apart))
        assert abs(coupled[name].value - independent) < 3 * math.hypot(error, coupled[name].standard_error)
        assert coupled.gains[name] > 1.0


def test_too_few_cohorts_are_refused():
    mixture = sg.Mixture({"model-ramp": 1.0})
    with pytest.raises(InputError, match="at least 20"):
        sg.simulate_difference(mixture, mixture, sg.Field(12.0), cohorts=10)


def test_the_longer_memory_holds_for_both(seed):
    # Light atoms forget soon; heavy ones do not, and attachment forces short windows on them.
    light = model(20 * ELECTRON_U, constant_frequency("elastic", 1e-13))
    heavy = model(400 * ELECTRON_U, constant_frequency("elastic", 1e-13), constant_frequency("attachment", 1e-14))
    field = sg.Field(10.0)
    alone = first_plan(heavy, field, seed, solved(heavy, field))
    both, swapped = coupled_plans(light, heavy, field, seed), coupled_plans(heavy, light, field, seed)
    for plan in (*both, *swapped):
        assert plan.memory * plan.window_time >= alone.memory * alone.window_time * (1 - 1e-9)
        assert plan.lags == both[0].lags <= MOST_LAGS
        assert plan.follows_memory == alone.follows_memory
