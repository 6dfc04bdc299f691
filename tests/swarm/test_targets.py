"""Accuracy targets: what they mean, and what is said of wrong ones."""

import math

import pytest

from swarmgauge.gas import InputError
from swarmgauge.swarm.estimate import Estimate
from swarmgauge.swarm.targets import parse_accuracy, worst


@pytest.mark.parametrize(
    ("accuracy", "message"),
    [
        (
            {"drift_velocty_flux": 0.01},
            'accuracy "drift_velocty_flux": no such quantity. The nearest is "drift_velocity_flux".',
        ),
        (
            {"mean_energy": 0.5},
            'accuracy "mean_energy": a relative error of 0.5 is 50 %. If per cent was meant, divide by 100.',
        ),
        (
            {"mean_energy": {"rel": 2}},
            'accuracy "mean_energy": a relative error of 2 is 200 %. If per cent was meant, divide by 100.',
        ),
        ({"mean_energy": -0.01}, 'accuracy "mean_energy": rel = -0.01 is not a number of 0 or more. Give a number.'),
        ({"mean_energy": "1 %"}, "accuracy \"mean_energy\": rel = '1 %' is not a number of 0 or more. Give a number."),
        ({"mean_energy": True}, 'accuracy "mean_energy": rel = True is not a number of 0 or more. Give a number.'),
        ({"mean_energy": math.nan}, 'accuracy "mean_energy": rel = nan is not a number of 0 or more. Give a number.'),
        ({"mean_energy": None}, 'accuracy "mean_energy": rel = None is not a number of 0 or more. Give a number.'),
        ({"mean_energy": 0}, 'accuracy "mean_energy": neither rel nor abs is above 0. Give at least one of them.'),
        ({"mean_energy": {}}, 'accuracy "mean_energy": neither rel nor abs is above 0. Give at least one of them.'),
        (
            {"mean_energy": {"rel": 0.01, "form_Td": 3}},
            'accuracy "mean_energy": unknown key "form_Td". Known keys: rel, abs, from_Td, to_Td.',
        ),
        (
            {"mean_energy": {"rel": 0.01, "from_Td": 30, "to_Td": 3}},
            'accuracy "mean_energy": from_Td = 30 is above to_Td = 3. Swap them.',
        ),
    ],
)  # fmt: skip
def test_wrong_targets(accuracy, message):
    with pytest.raises(InputError) as raised:
        parse_accuracy(accuracy)
    assert str(raised.value) == message
    assert "\n" not in str(raised.value)


def status(accuracy, name, estimate, field=10.0):
    return worst(parse_accuracy(accuracy), {name: estimate}, field).get(name)


def test_defaults_are_the_pinned_ones():
    # DESIGN, run file: W and mean energy 0.5 %, diffusion 2 %, net frequency 3 % or 1e-23.
    texts = {target.pattern: str(target) for target in parse_accuracy({})}
    assert texts == {
        "drift_velocity_*": "0.5 %",
        "mean_energy": "0.5 %",
        "diffusion_*": "2 %",
        "net_frequency_over_N": "3 % or 1e-23",
    }
    assert parse_accuracy(None) == parse_accuracy({})


def test_a_target_is_met_when_the_relative_or_the_absolute_one_is():
    both = {"net_frequency_over_N": {"rel": 0.1, "abs": 1e-20}}
    assert status(both, "net_frequency_over_N", Estimate(1e-18, 5e-20, "", 20))[1] == pytest.approx(0.5)
    assert status(both, "net_frequency_over_N", Estimate(1e-20, 5e-21, "", 20))[1] == pytest.approx(0.5)
    assert status(both, "net_frequency_over_N", Estimate(-1e-18, 2e-19, "", 20))[1] == pytest.approx(2.0)


def test_exact_values_and_unseen_processes():
    target = {"rate:*": {"rel": 0.1, "abs": 1e-20}}
    assert status(target, "rate:x/y", Estimate(0.0, 0.0, "", 20))[1] == 0.0
    assert status(target, "rate:x/y", Estimate(0.0, math.nan, "", 20, upper_bound=5e-21))[1] == pytest.approx(0.5)
    assert status(target, "rate:x/y", Estimate(0.0, math.nan, "", 20, upper_bound=2e-20))[1] == pytest.approx(2.0)
    assert status({"rate:*": 0.1}, "rate:x/y", Estimate(0.0, math.nan, "", 20, upper_bound=2e-20))[1] == math.inf
    assert status({"mean_energy": 0.1}, "mean_energy", Estimate(0.0, 1.0, "", 20))[1] == math.inf


def test_ranges_and_order():
    ranged = {"mean_energy": {"rel": 0.01, "from_Td": 30, "to_Td": 50}}
    estimate = Estimate(1.0, 0.02, "eV", 20)
    assert status(ranged, "mean_energy", estimate, 29.9) is None
    assert status(ranged, "mean_energy", estimate, 30.0)[1] == pytest.approx(2.0)
    assert status(ranged, "mean_energy", estimate, 50.0)[1] == pytest.approx(2.0)
    assert status(ranged, "mean_energy", estimate, 50.1) is None
    first = {"drift_velocity_flux": 0.001, "drift_velocity_*": 0.1}  # the first that applies counts
    assert status(first, "drift_velocity_flux", Estimate(1.0, 0.01, "m/s", 20))[1] == pytest.approx(10.0)
    assert status(first, "drift_velocity_bulk", Estimate(1.0, 0.01, "m/s", 20))[1] == pytest.approx(0.1)
    assert status(first, "mean_energy", estimate) is None


@pytest.mark.parametrize("name", ["rate:*", "rate:argon/x", "diffusion_*_bulk", "*", "characteristic_energy_T_flux"])
def test_names_and_patterns_that_exist(name):
    assert parse_accuracy({name: 0.05})[0].pattern == name
