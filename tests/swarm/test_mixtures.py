"""Mixtures of many gases, minorities and traces."""

import math

import pytest
from kernel.model_gases import constant_frequency, model_gas, power_law

from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import E_CHARGE, E_MASS, TOWNSEND
from swarmgauge.gas.process import Sharing
from swarmgauge.swarm.plan import MEMORY, RATE_UNIT
from swarmgauge.swarm.point_run import estimates_of

from .swarms import assert_exact, cohorts, swarm

NU = 1e-13
SHARES = {"a": 0.3, "b": 0.25, "c": 0.2, "d": 0.1499, "e": 0.1, "f": 1e-4, "g": 0.0}


def test_one_gas_in_seven_parts(seed):
    # Parts of one gas are that gas: all frequencies constant, and W = e E (1 + m/M) / (m (nu + 2 nu_i)), as both
    # electrons leave an ionization with m/(m + M) of the velocity. Rates in a minority and a trace come out as well.
    gases = {
        name: model_gas(
            0.4,
            constant_frequency("elastic", NU),
            constant_frequency("ionization", 1e-15, sharing=Sharing("equal")),
            constant_frequency("attachment", 4e-16),
            power_law("excitation", 1e-20, threshold_eV=0.0, passive=True),
            name=name,
        )
        for name in SHARES
    }
    mixture = Mixture({gases[name]: share for name, share in SHARES.items()})
    estimates, _ = swarm(mixture, 20.0, seed, 20)
    drift = E_CHARGE * 20.0 * TOWNSEND * (1 + mixture.gases[0].mass_ratio) / (E_MASS * (NU + 2e-15))
    exact = {
        "drift_velocity_flux": drift,
        "collision_frequency_over_N": NU + 1.4e-15,
        "net_frequency_over_N": 6e-16,
        **{f"rate:{name}/elastic": NU for name in SHARES},
        **{f"rate:{name}/ionization": 1e-15 for name in SHARES},
    }
    assert_exact(estimates, exact, {"drift": 3e-3, "rate": 2e-3, "collision": 1e-3, "net": 2e-3})
    # <v> from the first gas, where passive processes are seen best, and from the others.
    first = estimates["rate:a/excitation"]
    for name in "bcdefg":
        other = estimates[f"rate:{name}/excitation"]
        assert other.standard_error < 4e-3 * other.value
        assert abs(other.value - first.value) < 3.5 * math.hypot(first.standard_error, other.standard_error)


@pytest.mark.parametrize("temperature", [0.0, 3000.0])
def test_a_trace_does_not_act_and_is_averaged(seed, temperature):
    # Hard spheres as trace among hard spheres: rates go as the cross sections. In a warm gas each meets the electrons
    # at its own relative speed, sigma <|v - u|>, larger by (1 + m/M)^1/2 for Maxwellian electrons at E = 0.
    base = model_gas(0.1, power_law("elastic", 6e-20), name="base")
    trace = model_gas(0.02, power_law("elastic", 3e-20), power_law("ionization", 5e-20), name="trace")
    field = 3.0 if temperature == 0.0 else 0.0
    alone, _ = swarm(Mixture({base: 1.0}, temperature_K=temperature), field, seed, 20)
    mixture = Mixture({base: 1.0, trace: 0.0}, temperature_K=temperature)
    both, _ = swarm(mixture, field, seed + 100, 20)
    for name in ("mean_energy", "rate:base/elastic", "collision_frequency_over_N"):
        assert both[name].standard_error < 4e-3 * both[name].value
        assert abs(alone[name].value - both[name].value) < 3.5 * math.hypot(
            alone[name].standard_error, both[name].standard_error
        )
    ratio = 0.5
    if temperature:
        masses = [1 + gas.mass_ratio for gas in mixture.gases]
        ratio *= math.sqrt(masses[1] / masses[0])
    elastic, ionization = both["rate:trace/elastic"], both["rate:trace/ionization"]
    expected = both["rate:base/elastic"]
    error = math.hypot(elastic.standard_error, ratio * expected.standard_error)
    assert error < 4e-3 * elastic.value
    assert abs(elastic.value - ratio * expected.value) < 3.5 * error
    assert ionization.value == pytest.approx(5 / 3 * elastic.value, rel=1e-9)
    assert both["ionization_frequency_over_N"].value == 0.0


def test_a_trace_never_seen_has_a_bound(seed):
    base = model_gas(0.4, power_law("elastic", 6e-20), name="base")
    trace = model_gas(
        0.4, power_law("elastic", 3e-20), power_law("ionization", 6e-20, threshold_eV=900.0), name="trace"
    )
    reducer, rows = cohorts(Mixture({base: 1.0, trace: 0.0}), 0.3, seed, 4)
    estimate = estimates_of(reducer, rows)[0]["rate:trace/ionization"]
    assert estimate.value == 0.0
    assert math.isnan(estimate.standard_error)
    # Its cross section is that of the base, so 64 events for each of its candidates, 1/64 of all; and as many as it
    # would have during one relaxation time at twice the threshold, for the trace ends no excursion.
    plan = reducer.plan
    memory = plan.memory * plan.window_time
    events = 64.0 + 6.0 * math.sqrt(2 * 900.0) * memory / MEMORY
    time = rows[:, reducer.layout.slices["time"]].sum()
    assert estimate.upper_bound == pytest.approx(-math.log(0.05) * events / time * RATE_UNIT, rel=2e-3)
