"""The pilot: whether there is a steady swarm, and how much of a cohort is dropped."""

from dataclasses import replace

import numpy as np
import pytest
from kernel.model_gases import ELECTRON_U, HELIUM_U, constant_frequency, model, power_law

from swarm.swarms import cohorts
from swarmgauge.gas import Mixture
from swarmgauge.swarm.cohort import run_cohort
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.pilot import fly_pilot
from swarmgauge.swarm.plan import first_plan, solved
from swarmgauge.swarm.point_run import prepare


def outcome(mixture, field, seed):
    return prepare(mixture, Field(field), seed)


@pytest.mark.parametrize("exponent", [-1.0, -1.5])
def test_a_cross_section_that_falls_too_fast(seed, exponent):
    # sigma ~ 1/e^p: friction 2 m/M e sigma against the heating, J. R. Dreicer's runaway for p >= 1 (Phys. Rev. 115, 238
    # (1959)): the field gains more in every mean free path.
    pilot = outcome(model(HELIUM_U, power_law("elastic", 1e-20, exponent)), 100.0, seed)
    assert pilot.outcome == "runaway"
    assert pilot.plan is None
    assert pilot.note


@pytest.mark.parametrize(("name", "field"), [("helium-crompton1970", 5000.0), ("argon-yamabe1983", 20000.0)])
def test_real_gases_run_away_in_strong_fields(seed, name, field):
    # Losses per length have a maximum near 100 eV: at some E/N none balances the field. (At 2000 Td, with a
    # mean energy of 530 eV, helium still does so, scattering being isotropic.)
    pilot = outcome(Mixture({name: 1.0}), field, seed)
    assert pilot.outcome == "runaway", pilot.note
    assert pilot.plan is None


@pytest.mark.parametrize(
    ("name", "field"),
    [("helium-crompton1970", 300.0), ("argon-yamabe1983", 1000.0), ("nitrogen-schmalzried2023", 1000.0)],
)
def test_strong_fields_that_have_a_steady_swarm(seed, name, field):
    pilot = outcome(Mixture({name: 1.0}), field, seed)
    assert pilot.outcome == "steady"
    assert pilot.plan.relaxation_windows >= pilot.plan.lags
    assert pilot.plan.measured_windows >= 2 * pilot.plan.relaxation_windows


def test_attachment_of_all_electrons(seed):
    # Frequency 20 times that of elastic collisions: no cohort survives a window of 40 of them; shorter ones are tried.
    mixture = model(ELECTRON_U, constant_frequency("elastic", 1e-14), constant_frequency("attachment", 2e-13))
    field = Field(10.0)
    plan = first_plan(mixture, field, seed, solved(mixture, field), electrons=32)
    assert fly_pilot(plan).outcome == "steady"  # windows follow the attachment: the comb keeps the swarm alive
    long = replace(plan, window_time=30.0 * plan.window_time, lags=2, memory_windows=9)
    pilot = fly_pilot(long)
    assert pilot.outcome == "steady"
    assert pilot.plan.window_time * pilot.plan.memory == pytest.approx(long.window_time * long.memory)
    assert pilot.plan.window_time <= long.window_time / 4
    longest = fly_pilot(replace(long, window_time=1e6 * plan.window_time))
    assert longest.outcome == "extinct"
    assert longest.plan is None
    assert longest.note == "attachment took all electrons within the shortest window tried"


def test_attachment_before_energies_settle(seed):
    # In helium energies take 3700 collisions to relax, and attachment is 20 times as frequent as these.
    mixture = model(HELIUM_U, constant_frequency("elastic", 1e-14), constant_frequency("attachment", 2e-13))
    pilot = outcome(mixture, 10.0, seed)
    assert pilot.outcome == "extinct"
    assert pilot.note == "attachment takes the electrons long before their energies settle"


def _with_window(plan, window_time):
    return replace(plan, window_time=window_time)


def test_growth_beyond_the_lanes_halves_the_window(seed):
    mixture = model(HELIUM_U, constant_frequency("elastic", 1e-13), constant_frequency("ionization", 1e-14))
    field = Field(30.0)
    plan = first_plan(mixture, field, seed, solved(mixture, field))
    long = _with_window(plan, 8.0 * plan.window_time)  # growth by exp(1.2) in a window: more than the spare lanes hold
    pilot = fly_pilot(long)
    assert pilot.outcome == "steady"
    assert pilot.plan.window_time < long.window_time


def test_a_bad_start_is_forgotten(seed):
    # The true start of the two-term solution against a beam of 0.01 eV electrons: the same swarm after the cut.
    mixture, field = Mixture({"model-ramp": 1.0}), Field(24.0)
    reducer, good = cohorts(mixture, 24.0, seed, 20)
    plan = first_plan(mixture, field, seed + 1, solved(mixture, field))
    cold = replace(plan, start_edges_eV=np.array([0.0, 0.01]), start_cumulated=np.array([0.0, 1.0]))
    pilot = fly_pilot(cold)
    assert pilot.outcome == "steady"
    bad = np.array([run_cohort(pilot.plan, index)[0] for index in range(20)])
    for name in ("mean_energy", "drift_velocity_flux", "diffusion_T_times_N_flux"):
        a, b = reducer.quantities(good)[name], reducer.quantities(bad)[name]
        error = np.hypot(a.std(ddof=1), b.std(ddof=1)) / 20**0.5
        assert abs(a.mean() - b.mean()) < 4 * error
        assert error < 0.01 * a.mean()
