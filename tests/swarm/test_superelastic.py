"""Superelastic collisions: swarms at rest with their gas, the two-term balance, carbon dioxide at low fields."""

import math
from itertools import pairwise

import numpy as np
import pytest
from kernel.model_gases import power_law
from scipy.constants import e as E_CHARGE
from scipy.constants import k as BOLTZMANN
from scipy.special import gammainc

from swarmgauge.gas import Gas, Mixture, PowerLaw, Process, Ramp, load_named
from swarmgauge.swarm import solve_two_term
from swarmgauge.swarm.estimate import jackknife
from swarmgauge.swarm.point_run import estimates_of
from swarmgauge.swarm.reduce import lab_edges_eV

from .swarms import assert_exact, cohorts, swarm

KT_PER_KELVIN = BOLTZMANN / E_CHARGE
CO2 = "carbon-dioxide-hayashi1992"
COLD_LEVELS = {f"{CO2}/v1": 0.0, f"{CO2}/v3": 0.0}


def two_steps(law):
    """A gas with a level at 0.08 eV and one 0.1 eV above it."""
    levels = {"v": (1, 2, 0.08, None), "w": (2, 1, 0.1, "v")}
    return Gas(
        "model",
        "X",
        4.0,
        "momentum_transfer",
        (
            power_law("elastic", 1e-19),
            *(
                Process(name, "excitation", gap, law(gap), degeneracy_lower=below, degeneracy_upper=above, lower=lower)
                for name, (below, above, gap, lower) in levels.items()
            ),
        ),
    )


LAWS = {"ramp": lambda gap: Ramp(gap, 3e-19), "jump": lambda gap: PowerLaw(1e-20, 0.0)}


def maxwellian_means(edges_eV, thermal_eV):
    """Means of the Maxwellian f0 over bins, eV^-3/2, by scipy's incomplete gamma function."""
    return np.diff(gammainc(1.5, edges_eV / thermal_eV)) / np.diff(2 / 3 * edges_eV**1.5)


@pytest.mark.parametrize("law", LAWS)
def test_swarm_at_the_temperature_of_its_gas(law, seed):
    # Exact: detailed balance makes the Maxwellian of the gas the steady distribution; checked over four decades of f0.
    thermal_eV = 600.0 * KT_PER_KELVIN
    mixture = Mixture({two_steps(LAWS[law]): 1.0}, temperature_K=600.0)
    reducer, rows = cohorts(mixture, 0.0, seed, 20)
    estimates, _, _ = estimates_of(reducer, rows)
    assert_exact(estimates, {"mean_energy": 1.5 * thermal_eV}, {"mean_energy": 1e-3})
    edges = lab_edges_eV()
    bounds = np.searchsorted(edges, thermal_eV * np.linspace(0.0, 10.0, 21))
    volume = np.diff(2 / 3 * edges**1.5)

    def grouped(sums):
        weighted = reducer.distribution(sums)[0] * volume
        return np.stack([weighted[:, a:b].sum(axis=1) for a, b in pairwise(bounds)], axis=1)

    share, error, _ = jackknife(grouped, rows)
    exact = np.diff(gammainc(1.5, edges[bounds] / thermal_eV))
    f0 = maxwellian_means(edges[bounds], thermal_eV)
    assert f0[-1] < 1e-4 * f0[0]
    deviation = (share - exact) / error
    assert np.abs(deviation).max() < 3.5
    assert (deviation**2).mean() < 2.2  # 20 numbers, weakly correlated: exceeded once in 500
    assert (error / exact)[f0 > 1e-3 * f0[0]].max() < 0.02
    assert (error / exact).max() < 0.06
    # Forward and reverse events are equally frequent.
    for name in ("v", "w"):
        forward, reverse = estimates[f"rate:model/{name}"], estimates[f"superelastic_rate:model/{name}"]
        assert reverse.standard_error < 0.004 * reverse.value
        assert abs(forward.value - reverse.value) < 3.5 * math.hypot(forward.standard_error, reverse.standard_error)


@pytest.mark.parametrize("law", LAWS)
@pytest.mark.parametrize("temperature", [150.0, 600.0, 3000.0])
def test_two_term_at_the_temperature_of_its_gas(law, temperature):
    thermal_eV = temperature * KT_PER_KELVIN
    result = solve_two_term(Mixture({two_steps(LAWS[law]): 1.0}, temperature_K=temperature), 0.0)
    assert result.values["mean_energy"] == pytest.approx(1.5 * thermal_eV, rel=1e-4)
    exact = maxwellian_means(result.energy_edges_eV, thermal_eV)
    seen = result.f0 > 1e-10 * result.f0.max()
    np.testing.assert_allclose(result.f0[seen], exact[seen], rtol=0.02)  # worst in the narrow cells near rest
    seen &= result.energy_edges_eV[:-1] > 0.2 * thermal_eV
    np.testing.assert_allclose(result.f0[seen], exact[seen], rtol=1e-3)
    for name in ("v", "w"):
        forward = result.values[f"rate:model/{name}"]
        assert result.values[f"superelastic_rate:model/{name}"] == pytest.approx(forward, rel=2e-4)
    mobility = result.values["mobility_times_N_flux"]
    assert result.values["diffusion_T_times_N_flux"] / mobility == pytest.approx(thermal_eV, rel=1e-3)


def test_electrons_at_the_temperature_of_the_levels():
    # Elastic collisions with molecules of 1e6 u exchange next to nothing: f0(e + gap) / f0(e) is then
    # n_u g_l / (n_l g_u) exactly, here that of 2500 K in a gas of 300 K, whatever the field is too weak to change.
    gas = Gas(
        "heavy",
        "X",
        1e6,
        "momentum_transfer",
        (
            power_law("elastic", 1e-20),
            Process("v", "excitation", 0.2, Ramp(0.2, 1e-19), degeneracy_lower=1, degeneracy_upper=1, vibrational=True),
        ),
    )
    hot = math.exp(-0.2 / (2500.0 * KT_PER_KELVIN))
    given = hot / (1.0 + hot)
    for state in ({"vibrational_temperature_K": 2500.0}, {"level_fractions": {"heavy/v": given}}):
        result = solve_two_term(Mixture({gas: 1.0}, temperature_K=300.0, **state), 0.0)
        middle = 0.5 * (result.energy_edges_eV[1:] + result.energy_edges_eV[:-1])
        at = np.array([0.02, 0.05, 0.1, 0.15, 0.3, 0.6])
        logarithm = np.log(result.f0)
        ratio = np.interp(at + 0.2, middle, logarithm) - np.interp(at, middle, logarithm)
        np.testing.assert_allclose(ratio, math.log(hot), rtol=5e-3)


@pytest.mark.parametrize("field", [0.3, 10.0, 300.0])
def test_power_balance_of_two_term(field):
    state = {"temperature_K": 600.0, "vibrational_temperature_K": 2000.0}
    values = solve_two_term(Mixture({CO2: 0.5, "nitrogen-phelps1985": 0.5}, **state), field).values
    assert abs(values["energy_balance_residual"]) < 1e-7
    gains = [value for name, value in values.items() if name.startswith("gain_fraction:")]
    assert len(gains) == 2 + 8
    assert sum(gains) > 0.002
    gain = 0.5 * values[f"superelastic_rate:{CO2}/v1"] * 0.083 * E_CHARGE / values["field_heating_over_N"]
    assert values[f"gain_fraction:{CO2}/v1"] == pytest.approx(gain, rel=2e-3)


def test_einstein_relation_in_carbon_dioxide():
    # D_T / mu tends to kT/e at low fields; without the reverse of v1 the electrons freeze to two thirds of it. The last
    # 2 % are the lumped levels, which have no reverse.
    thermal_eV = 293.15 * KT_PER_KELVIN
    warm = solve_two_term(Mixture({CO2: 1.0}, temperature_K=293.15), 0.05).values
    without = solve_two_term(Mixture({CO2: 1.0}, temperature_K=293.15, level_fractions=COLD_LEVELS), 0.05).values
    assert warm["characteristic_energy_T_flux"] == pytest.approx(thermal_eV, rel=0.025)
    assert without["characteristic_energy_T_flux"] < 0.7 * thermal_eV


# By how much the reverse collisions of carbon dioxide raise drift velocity and D_T / mu, by two-term theory: below
# 10 Td W rises by up to 2.7 % at 293.15 K, by up to 15 % at 573.15 K.
SHIFTS = [(293.15, 10.0, 1.0267, 1.1286), (573.15, 5.0, 1.0740, 1.6867)]


@pytest.mark.parametrize(("temperature", "field", "drift", "energy"), SHIFTS)
def test_reverse_collisions_of_carbon_dioxide(temperature, field, drift, energy, seed):
    # The Monte Carlo swarm, which shares only the cross sections with the two-term solver, moves by as much as stated.
    warm, cold = (
        Mixture({CO2: 1.0}, temperature_K=temperature, level_fractions=levels) for levels in (None, COLD_LEVELS)
    )
    moved = [swarm(mixture, field, seed, 20)[0] for mixture in (warm, cold)]
    expected = [solve_two_term(mixture, field).values for mixture in (warm, cold)]
    for name, shift, precision in (
        ("drift_velocity_flux", drift, 0.006),
        ("mean_energy", None, 0.005),
        ("characteristic_energy_T_flux", energy, 0.03),
    ):
        ratio = moved[0][name].value / moved[1][name].value
        error = ratio * math.hypot(*(m[name].standard_error / m[name].value for m in moved))
        two_term = expected[0][name] / expected[1][name]
        assert error < precision
        assert abs(ratio - two_term) < 3.5 * error + 5e-4
        if shift is not None:
            assert two_term == pytest.approx(shift, rel=5e-4)
    balance = moved[0]["energy_balance_residual"]
    assert balance.standard_error < 0.01
    assert abs(balance.value) < 3.5 * balance.standard_error + 2e-4
    assert moved[0][f"gain_fraction:{CO2}/v1"].value > 0.05


def test_nothing_changes_in_a_cold_gas():
    given = load_named(CO2)
    bare = [Mixture({CO2: 1.0}), Mixture({CO2: 1.0}, level_fractions=COLD_LEVELS)]
    values = [solve_two_term(mixture, 5.0).values for mixture in bare]
    assert values[0] == values[1]
    assert not any(name.startswith("superelastic_rate:") for name in values[0])
    assert bare[0].canonical() == bare[1].canonical()
    assert bare[0].share_hit(given, given.process("v1")) == 1.0
