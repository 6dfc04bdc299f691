"""Steady-state Townsend swarms: exact cases, the power balance in space, time-of-flight series, outcomes."""

import math
from dataclasses import replace

import numpy as np
import pytest
from kernel.model_gases import ELECTRON_U, HELIUM_U, constant_frequency, model, power_law

from swarm.moment_hierarchy import Hierarchy
from swarm.swarms import assert_exact
from swarm.test_point_run import same
from swarmgauge.gas import InputError, Mixture
from swarmgauge.gas.constants import SPEED_1_EV, TOWNSEND
from swarmgauge.gas.process import Sharing
from swarmgauge.swarm.bin_means import bin_weights
from swarmgauge.swarm.cohort import run_cohort, serial_sum
from swarmgauge.swarm.estimate import jackknife
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.plan import RATE_UNIT
from swarmgauge.swarm.point_run import PointRun, estimates_of, prepare
from swarmgauge.swarm.quantities import is_spatial
from swarmgauge.swarm.reduce import Reducer, lab_edges
from swarmgauge.swarm.schedule import simulate
from swarmgauge.swarm.spatial import NOT_FOUND, Exponent, local_values, tilted_part

NU = 1e-13
ASKED = {"townsend_*": 0.01, "sst_*": 0.02}


def steady(mixture, field, seed, count):
    """Reducer and sums of cohorts with their tilted twins."""
    plan = prepare(mixture, Field(field), seed, spatial=True).plan
    assert plan.spatial is not None
    return Reducer(plan), np.stack([run_cohort(plan, index)[0] for index in range(count)])


@pytest.mark.parametrize(
    ("mass_ratio", "gain", "loss", "field", "count"),
    [(1.0, 0.05, 0.0, 300.0, 40), (1.0, 0.0, 0.05, 300.0, 40), (0.05, 0.005, 0.0, 300.0, 40)],
)
def test_constant_frequencies(seed, mass_ratio, gain, loss, field, count):
    # Exact to the eighth order in alpha: the swarm at one place is 11 % colder than the whole one, or 19 % hotter where
    # electrons are lost.
    processes = [constant_frequency("elastic", NU)]
    if gain > 0.0:
        processes.append(constant_frequency("ionization", gain * NU, sharing=Sharing("equal")))
    if loss > 0.0:
        processes.append(constant_frequency("attachment", loss * NU))
    reducer, rows = steady(model(ELECTRON_U / mass_ratio, *processes), field, seed, count)
    estimates, _, _ = estimates_of(reducer, rows)
    nu = NU / RATE_UNIT
    exact = Hierarchy(reducer.plan.acceleration, mass_ratio, nu, gain * nu, loss * nu, 8)
    alpha, last = exact.root()
    assert last < 2e-4 * abs(alpha)
    drift, energy = exact.moment(1, 1, alpha), exact.moment(2, 0, alpha)
    values = {
        "sst_mean_energy": energy,
        "sst_drift_velocity": drift * SPEED_1_EV,
        "townsend_effective_over_N": (gain - loss) * nu / drift * RATE_UNIT / SPEED_1_EV,
        "mean_energy": exact.moment(2, 0, 0.0),
    }
    if gain > 0.0:
        values["townsend_alpha_over_N"] = gain * NU / drift / SPEED_1_EV
    assert ("townsend_eta_over_N" in estimates) == (loss > 0.0)
    assert_exact(estimates, values, {"": 1.5e-3}, theory=2e-4)
    assert abs(energy / exact.moment(2, 0, 0.0) - 1.0) > 0.05


def test_as_many_born_as_lost(seed):
    # alpha = 0: the steady swarm is the whole swarm, and alpha and eta are both nu / W.
    mixture = model(
        ELECTRON_U,
        constant_frequency("elastic", NU),
        constant_frequency("ionization", 0.05 * NU, sharing=Sharing("equal")),
        constant_frequency("attachment", 0.05 * NU),
    )
    reducer, rows = steady(mixture, 300.0, seed, 20)
    estimates, _, _ = estimates_of(reducer, rows)
    nu = NU / RATE_UNIT
    drift = Hierarchy(reducer.plan.acceleration, 1.0, nu, 0.05 * nu, 0.05 * nu, 1).moment(1, 1, 0.0) * SPEED_1_EV
    exact = {
        "sst_drift_velocity": drift,
        "townsend_alpha_over_N": 0.05 * NU / drift,
        "townsend_eta_over_N": 0.05 * NU / drift,
    }
    assert_exact(estimates, exact, {"": 2e-3})
    effective = estimates["townsend_effective_over_N"]
    assert effective.interval() == (0.0, 0.0)  # to the last bit, as both have the same cross section
    assert reducer.plan.spatial.lever == 0.0


def test_close_to_the_balance(seed):
    # Air at 120 Td, where pilots can hardly tell alpha from 0. D_L alpha / W = 2e-4: alpha = R / W.
    air = Mixture(
        {"nitrogen-phelps1985": 0.8, "oxygen-lawton1978": 0.2},
        temperature_K=293.15,
        leave_out=("oxygen-lawton1978/attachment-3body",),
    )
    reducer, rows = steady(air, 120.0, seed, 8)
    estimates = estimates_of(reducer, rows)[0]
    effective, alpha, eta = (estimates[f"townsend_{kind}_over_N"] for kind in ("effective", "alpha", "eta"))
    first = estimates["net_frequency_over_N"].value / estimates["drift_velocity_bulk"].value
    error = estimates["net_frequency_over_N"].standard_error / estimates["drift_velocity_bulk"].value
    assert effective.standard_error < 0.05 * alpha.value
    assert abs(effective.value - first) < 3.5 * math.hypot(error, effective.standard_error)
    assert alpha.value - eta.value == pytest.approx(effective.value, abs=1e-9 * alpha.value)


def test_power_balance_in_space(seed):
    # What the field gives to the electrons at a place is lost there or carried on: e E <v_z> = losses + alpha <v_z e>,
    # and at a trial that grows in time, + lambda <e>. (Boltzmann's equation times the energy.)
    reducer, rows = steady(Mixture({"model-ionization-f05": 1.0}), 60.0, seed, 20)
    tilted, tilted_rows = tilted_part(reducer, rows)
    edges, field = lab_edges(), 60.0 * TOWNSEND
    alpha = tilted.plan.alpha

    def residual(sums):
        values = local_values(tilted, sums)
        heating = values["drift_velocity_flux"] * field
        lost = tilted.power(sums, values)["energy_loss_coefficient"]
        lab = sums[:, tilted.layout.slices["lab"]].reshape(len(sums), -1, 2)
        flux = serial_sum(lab[:, :, 1] * bin_weights(edges, 3, 2)) / serial_sum(lab[:, :, 0])
        growth = values["net_frequency_over_N"] / RATE_UNIT - alpha * values["drift_velocity_flux"] / SPEED_1_EV
        carried = alpha * flux * RATE_UNIT
        left = heating - lost - carried - growth * values["mean_energy"] * RATE_UNIT
        return np.stack([left / heating, carried / heating], axis=1)

    value, error, _ = jackknife(residual, tilted_rows)
    assert error[0] < 1.5e-3
    assert abs(value[0]) < 3.5 * error[0]
    assert value[1] > 0.05


def test_growth_in_space_is_the_root_of_the_time_of_flight_series(seed):
    # R - W alpha + D_L alpha^2 - Q alpha^3 + ... = 0 with bulk coefficients, of the plain swarm of the same cohorts;
    # the orders alternate about the root here.
    reducer, rows = steady(Mixture({"argon-yamabe1983": 1.0}), 300.0, seed, 40)
    estimates, _, _ = estimates_of(reducer, rows)
    rate, drift, diffusion, skewness = (
        estimates[name].value
        for name in (
            "net_frequency_over_N",
            "drift_velocity_bulk",
            "diffusion_L_times_N_bulk",
            "skewness_L_times_N2_bulk",
        )
    )
    effective = estimates["townsend_effective_over_N"]
    assert effective.standard_error < 2e-3 * effective.value

    def root(coefficients):
        found = np.roots(coefficients)
        return found[np.argmin(np.abs(found))].real

    first, second, third = rate / drift, root([diffusion, -drift, rate]), root([-skewness, diffusion, -drift, rate])
    assert first < 0.93 * effective.value  # a rate over W is not alpha
    assert abs(second / effective.value - 1.0) < 0.01
    assert abs(third / effective.value - 1.0) < 0.01
    assert third - 4e-3 * third < effective.value < second + 4e-3 * second
    assert estimates["sst_mean_energy"].value < 0.97 * estimates["mean_energy"].value


def test_the_trial_does_not_matter(seed):
    # Two per cent off the root, values are moved back to it.
    reducer, rows = steady(Mixture({"argon-yamabe1983": 1.0}), 300.0, seed, 20)
    spatial = reducer.plan.spatial
    off = type(spatial)(1.02 * spatial.alpha, spatial.lever / 1.02)
    other = Reducer(reducer.plan.with_spatial(off))
    other_rows = np.stack([run_cohort(other.plan, index)[0] for index in range(20)])
    mine, theirs = (estimates_of(*pair)[0] for pair in ((reducer, rows), (other, other_rows)))
    for name in ("townsend_effective_over_N", "sst_mean_energy", "sst_drift_velocity"):
        error = math.hypot(mine[name].standard_error, theirs[name].standard_error)
        assert error < 4e-3 * mine[name].value
        assert abs(mine[name].value - theirs[name].value) < 3.5 * error


def test_no_root():
    # R = 0.3 nu is more than W^2 / (4 D): density cannot grow as exp(alpha z) in a steady state.
    mixture = model(
        0.05, constant_frequency("elastic", NU), constant_frequency("ionization", 0.3 * NU, sharing=Sharing("equal"))
    )
    point = simulate(mixture, Field(3.0), accuracy={"townsend_effective_over_N": 0.05, "mean_energy": 0.05})
    assert point.status == "done"
    assert not any(is_spatial(name) for name in point)
    assert "no steady-state Townsend" in point.warnings[0]
    assert point.sst_eedf is None


def test_a_growth_that_is_not_found_misses_its_target(seed):
    mixture, field = Mixture({"model-ionization-f1": 1.0}), Field(200.0)
    run = PointRun(mixture, field, seed=seed, accuracy=ASKED)
    run.set_pilot(replace(prepare(mixture, field, seed), spatial_note=NOT_FOUND))
    for index in range(20):
        run.add(index, *run_cohort(run.pilot.plan, index))
    assert run.finished
    assert run.result().status == "target missed"
    assert "was not found" in run.result().warnings[0]


def test_nothing_is_born_or_lost():
    point = simulate(
        model(HELIUM_U, power_law("elastic", 6e-20)), Field(10.0), accuracy={"sst_*": 0.2, "mean_energy": 0.2}
    )
    assert not any(is_spatial(name) for name in point)
    assert point.warnings == ()


def test_only_where_asked():
    mixture = Mixture({"model-ionization-f05": 1.0})
    assert not PointRun(mixture, Field(60.0)).spatial
    assert PointRun(mixture, Field(60.0), accuracy={"sst_mean_energy": 0.01}).spatial
    assert PointRun(mixture, Field(60.0), accuracy={"sst_rate:model-ionization-f05/ionization": 0.01}).spatial
    below = {"townsend_alpha_over_N": {"rel": 0.01, "to_Td": 50}}
    assert not PointRun(mixture, Field(60.0), accuracy=below).spatial
    assert PointRun(mixture, Field(60.0)).key != PointRun(mixture, Field(60.0), accuracy=ASKED).key
    with pytest.raises(InputError, match="townsend_alpha_over_N"):
        PointRun(mixture, Field(60.0), accuracy={"townsend_alfa_over_N": 0.01})


def test_a_point_with_its_steady_swarm_goes_on_with_equal_bits(seed):
    mixture, field = Mixture({"model-ionization-f1": 1.0}), Field(200.0)
    whole = PointRun(mixture, field, seed=seed, accuracy=ASKED)
    whole.set_pilot(prepare(mixture, field, seed, spatial=True))
    for index in range(20):
        whole.add(index, *run_cohort(whole.pilot.plan, index))
        if index == 6:
            state = whole.state()
    later = PointRun(mixture, field, seed=seed, accuracy=ASKED, state=state)
    for index in later.missing():
        later.add(index, *run_cohort(later.pilot.plan, index))
    same(whole.result(), later.result())
    point = whole.result()
    names = [name for name in point if is_spatial(name)]
    assert names[:4] == [
        "townsend_alpha_over_N",
        "townsend_effective_over_N",
        "sst_mean_energy",
        "sst_drift_velocity",
    ]
    width = np.diff(point.sst_eedf.energy_edges_eV**1.5) / 1.5
    assert np.sum(point.sst_eedf.f0 * width) == pytest.approx(1.0, rel=1e-12)
    rate = point["sst_rate:model-ionization-f1/ionization"].value
    alpha = rate / point["sst_drift_velocity"].value
    assert point["townsend_alpha_over_N"].value == pytest.approx(alpha, rel=1e-12)


def test_growth_never_seen_is_bounded(seed):
    far = power_law("ionization", 1e-20, threshold_eV=500.0)
    mixture = model(HELIUM_U, power_law("elastic", 6e-20), power_law("excitation", 1e-20, threshold_eV=2.0), far)
    estimates = estimates_of(*steady(mixture, 20.0, seed, 4))[0]
    rate, alpha = estimates["sst_rate:model/ionization"], estimates["townsend_alpha_over_N"]
    assert alpha.value == rate.value == 0.0
    assert alpha.upper_bound == pytest.approx(rate.upper_bound / estimates["sst_drift_velocity"].value, rel=1e-12)
    assert estimates["townsend_effective_over_N"].interval()[0] == -alpha.upper_bound


def test_root_of_the_two_term_exponent():
    assert Exponent(1.0, 1.0, 2.0, 0.0).root == pytest.approx(0.5)
    assert Exponent(-1.0, 1.0, 2.0, 1.0).root == pytest.approx(1.0 - math.sqrt(2.0))
    hopeless = Exponent(2.0, 2.0, 2.0, 1.0)  # square negative: a start on the steep side all the same
    assert 0.0 < hopeless.root < 1.0 * hopeless.rate
