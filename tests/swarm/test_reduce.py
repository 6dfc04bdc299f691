"""From sums to coefficients: identities that hold within one run, and sets that watch without acting."""

import numpy as np
import pytest
from kernel.model_gases import HELIUM_U, model, power_law
from scipy import integrate

from swarm.swarms import cohorts, swarm
from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, SPEED_1_EV, TOWNSEND
from swarmgauge.swarm.plan import RATE_UNIT
from swarmgauge.swarm.point_run import estimates_of
from swarmgauge.swarm.reduce import lab_edges_eV


@pytest.fixture(scope="module")
def argon():
    """Argon at 300 Td, 20 cohorts: reducer, sums, estimates, distribution."""
    reducer, rows = cohorts(Mixture({"argon-yamabe1983": 1.0}, temperature_K=300.0), 300.0, 1, 20)
    return reducer, rows, *estimates_of(reducer, rows)[:2]


def test_f0_is_normalised(argon):
    # DESIGN: int f0 sqrt(e) de = 1, for the bins as they are.
    eedf = argon[3]
    assert float(eedf.f0 @ np.diff(eedf.energy_edges_eV**1.5 / 1.5)) == pytest.approx(1.0, rel=1e-9)
    assert (eedf.f0 >= 0).all()
    assert len(eedf.energy_edges_eV) == len(eedf.f0) + 1 == len(eedf.f1) + 1
    assert eedf.f0_standard_error.shape == eedf.f1_standard_error.shape == eedf.f0.shape


def test_drift_from_f1(argon):
    # W_flux = (1/3) sqrt(2e/m) int e f1 de: from collision points, against the mean path. Two estimators of one swarm.
    _, rows, estimates, eedf = argon
    drift = SPEED_1_EV / 3 * float(eedf.f1 @ np.diff(eedf.energy_edges_eV**2 / 2))
    expected = estimates["drift_velocity_flux"]
    assert expected.standard_error < 2e-3 * expected.value
    own = drift_of_each(argon) - per_cohort(argon, "drift_velocity_flux")
    error = own.std(ddof=1) / len(rows) ** 0.5
    assert error < 2e-3 * expected.value
    assert abs(drift - expected.value) < 4 * error


def drift_of_each(argon):
    reducer, rows = argon[:2]
    f1 = reducer.distribution(rows)[1]
    return SPEED_1_EV / 3 * f1 @ np.diff(lab_edges_eV() ** 2 / 2)


def per_cohort(argon, name):
    reducer, rows = argon[:2]
    return reducer.quantities(rows)[name]


def test_mean_energy_from_f0(argon):
    # int e^(3/2) f0 de with bin means: exact up to the width of the bins (1.6 % each).
    eedf, expected = argon[3], argon[2]["mean_energy"]
    edges = eedf.energy_edges_eV
    assert float(eedf.f0 @ np.diff(edges**2.5 / 2.5)) == pytest.approx(expected.value, rel=2e-3)


def test_rates_from_f0(argon):
    # k = sqrt(2e/m) int sigma e f0 de of every process, by scipy over the bins, against the kernel's speed histogram.
    reducer, _, estimates, eedf = argon
    gas = reducer.plan.mixture.gases[0]
    edges = eedf.energy_edges_eV
    for process in gas.processes:
        total = 0.0
        for low, high, f0 in zip(edges[:-1], edges[1:], eedf.f0, strict=True):
            total += f0 * integrate.fixed_quad(lambda e, p=process: e * p.cross_section(e), low, high, n=5)[0]
        expected = estimates[f"rate:{gas.name}/{process.id}"]
        # a bin that holds a threshold counts as evenly filled: some parts in a thousand
        assert SPEED_1_EV * total == pytest.approx(expected.value, rel=5e-3)


def test_counts_of_events_agree_with_rates(argon):
    # Expected and counted events of the rare kind: the share of flights that ended in one.
    reducer, rows, estimates, _ = argon
    at = reducer.layout.slices
    flights = rows[:, at["flights"]].sum(axis=0)
    # counts are of electrons, not of weights: time of all electrons, that in a window as the mean of its ends
    plan = reducer.plan
    time = 0.5 * plan.window_time * (plan.electrons * rows[:, at["windows"]].sum() + rows[:, at["alive"]].sum())
    gas = plan.mixture.gases[0]
    names = [f"rate:{gas.name}/{p.id}" for p in gas.processes if p.kind != "elastic"]
    rate = sum(estimates[name].value for name in names) / RATE_UNIT
    assert flights[3] / time == pytest.approx(rate, rel=2e-3 + 5 / flights[3] ** 0.5)
    elastic = estimates[f"rate:{gas.name}/elastic"].value / RATE_UNIT
    assert flights[2] / time == pytest.approx(elastic, rel=2e-3 + 5 / flights[2] ** 0.5)


def test_relations_between_quantities(argon):
    estimates = argon[2]
    value = {name: estimate.value for name, estimate in estimates.items()}
    field = 300.0 * TOWNSEND
    for kind in ("flux", "bulk"):
        mobility = value[f"drift_velocity_{kind}"] / field
        assert value[f"mobility_times_N_{kind}"] == pytest.approx(mobility, rel=1e-12)
        for axis in "LT":
            energy = value[f"diffusion_{axis}_times_N_{kind}"] / mobility
            assert value[f"characteristic_energy_{axis}_{kind}"] == pytest.approx(energy, rel=1e-12)
    heating = E_CHARGE * field * value["drift_velocity_flux"]
    assert value["field_heating_over_N"] == pytest.approx(heating, rel=1e-12)
    shares = [v for name, v in value.items() if name.startswith("loss_fraction:")]
    assert sum(shares) + value["energy_balance_residual"] == pytest.approx(1.0, rel=1e-12)
    balance = estimates["energy_balance_residual"]
    assert abs(balance.value) < 4 * balance.standard_error
    assert balance.standard_error < 2e-3
    growth = value["loss_fraction:population_change"] * heating / E_CHARGE
    assert growth == pytest.approx(value["net_frequency_over_N"] * value["mean_energy"], rel=1e-12)


def test_growth_of_the_population_agrees_with_expected_births(argon):
    # Counted: population at the end of each window over that at its start; expected: from the rates.
    reducer, rows, estimates, _ = argon
    at = reducer.layout.slices
    plan = reducer.plan
    growth = np.log(rows[:, at["alive"]][:, 0] / rows[:, at["windows"]][:, 0] / plan.electrons) / plan.window_time
    error = growth.std(ddof=1) / len(rows) ** 0.5
    expected = estimates["net_frequency_over_N"]
    assert error < 0.01 * growth.mean()
    off = growth.mean() - expected.value / RATE_UNIT
    assert abs(off) < 4 * np.hypot(error, expected.standard_error / RATE_UNIT)


def test_passive_processes_and_traces_are_averaged_without_acting(seed):
    acting = (power_law("elastic", 6e-20), power_law("excitation", 1e-20, threshold_eV=2.0))
    seen = power_law("excitation", 1e-20, threshold_eV=2.0, name="seen", passive=True)
    capture = power_law("attachment", 1e-20, name="capture", passive=True)
    plain = swarm(model(HELIUM_U, *acting), 20.0, seed, 8)[0]
    watched = swarm(model(HELIUM_U, *acting, seen, capture), 20.0, seed, 8)[0]
    assert watched["rate:model/seen"].value == pytest.approx(watched["rate:model/excitation"].value, rel=1e-12)
    assert watched["rate:model/capture"].value > 0
    assert "net_frequency_over_N" not in watched
    for name in ("drift_velocity_flux", "mean_energy"):  # another key, so other streams: within errors
        off = watched[name].value - plain[name].value
        assert abs(off) < 5 * np.hypot(watched[name].standard_error, plain[name].standard_error)


def test_the_power_balance_holds_the_recoil_of_ionization(seed):
    # Atoms as light as 0.02 u (m/M = 0.027): what they take in ionization is a tenth of the field's power.
    mixture = model(0.02, power_law("elastic", 6e-20), power_law("ionization", 3e-20, threshold_eV=5.0))
    estimates = swarm(mixture, 300.0, seed, 20)[0]
    residual = estimates["energy_balance_residual"]
    assert abs(residual.value) < 3.5 * residual.standard_error
    assert residual.standard_error < 1e-3
    without = estimates["rate:model/ionization"].value * 5.0 / (estimates["field_heating_over_N"].value / E_CHARGE)
    assert estimates["loss_fraction:model/ionization"].value > without + 0.02


def test_no_field(seed):
    # E = 0: no drift, no mobility or heating; D by the Einstein relation is tested with the exact cases.
    mixture = model(0.05, power_law("elastic", 6e-20), temperature_K=300.0)
    estimates = swarm(mixture, 0.0, seed, 24)[0]
    assert estimates["drift_velocity_flux"].value == 0.0
    assert estimates["drift_velocity_bulk"].standard_error == 0.0
    assert not [name for name in estimates if name.startswith(("mobility", "characteristic", "field", "loss"))]
    energy = estimates["mean_energy"]
    thermal = 1.5 * BOLTZMANN * 300.0 / E_CHARGE
    assert energy.standard_error < 0.02 * thermal
    assert abs(energy.value - thermal) < 4 * energy.standard_error
