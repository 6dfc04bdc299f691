"""Swarms that attachment all but kills: constant frequencies take every electron alike and leave the averages exact."""

import pytest
from kernel.model_gases import ELECTRON_U, constant_frequency, model

from swarmgauge.swarm.field import Field
from swarmgauge.swarm.pilot import fly_pilot
from swarmgauge.swarm.plan import LARGEST_LOSS, MOST_LAGS, first_plan, solved
from swarmgauge.swarm.point_run import PointRun

from .swarms import assert_exact, cohorts, swarm
from .test_exact import NU, constant_frequency_moments

DIFFUSION = "diffusion_T_times_N_flux"


def attaching(times, molar_mass=ELECTRON_U):
    """Elastic collisions at NU, and attachment so many times as often."""
    return model(molar_mass, constant_frequency("elastic", NU), constant_frequency("attachment", times * NU))


@pytest.mark.parametrize(
    ("times", "count", "fine", "coarse"),
    [(0.3, 12, 2e-3, 8e-3), (10.0, 12, 0.012, 0.035), pytest.param(100.0, 48, 0.025, 0.07, marks=pytest.mark.slow)],
)
def test_drift_and_energy_are_those_without_attachment(seed, times, count, fine, coarse):
    # At 10 (100) times the elastic frequency one electron in 4e4 (1e434) lives for a collision time; the averages over
    # those alive are exactly those of the gas without attachment.
    estimates, _ = swarm(attaching(times), 100.0, seed, count)
    exact = constant_frequency_moments(ELECTRON_U, 100.0, 0.0)
    exact["collision_frequency_over_N"] *= 1 + times
    exact["net_frequency_over_N"] = -times * NU
    followed = times < 1.0
    assert (DIFFUSION in estimates) is followed
    assert ("drift_velocity_bulk" in estimates) is followed
    known = {name: value for name, value in exact.items() if name in estimates}
    assert {"drift_velocity_flux", "mean_energy"} <= set(known)
    assert_exact(estimates, known, {"drift": fine, "mean": coarse, "diffusion": 0.02, "coll": 5e-3, "net": 5e-3})


def test_windows_of_strong_attachment(seed):
    field = Field(100.0)
    plans = {
        times: first_plan(attaching(times), field, seed, solved(attaching(times), field)) for times in (1e-4, 1.0, 30.0)
    }
    assert [plan.follows_memory for plan in plans.values()] == [True, True, False]
    assert all(plan.lags <= MOST_LAGS for plan in plans.values())
    rates = {times: times * plan.tables.net_frequency[0] / times for times, plan in plans.items()}
    for times, plan in plans.items():
        assert abs(rates[times]) * plan.window_time < 1.05 * LARGEST_LOSS
    # Relaxation takes 2 elastic collision times here, whatever is attached: the memory is 16 of them.
    memory = [plan.memory * plan.window_time * abs(rates[times]) / times for times, plan in plans.items()]
    assert memory[1] == pytest.approx(16.0, rel=0.1)
    assert memory[2] == pytest.approx(16.0, rel=0.1)


def test_a_point_says_what_it_cannot_give(seed):
    # Weak accuracy, one judgement: the warning, no diffusion, and the plan comes back from the state of the point.
    run = PointRun(attaching(10.0), Field(100.0), seed=seed, accuracy={"drift_velocity_flux": 0.2})
    run.set_pilot(fly_pilot(first_plan(run.mixture, run.field, seed, solved(run.mixture, run.field))))
    _, rows = cohorts(attaching(10.0), 100.0, seed, 2)
    for index, row in enumerate(rows):
        run.add(index, row, 0.0)
    point = run.result()
    assert DIFFUSION not in point.estimates
    assert "no diffusion and no bulk coefficients" in point.warnings[0]
    again = PointRun(attaching(10.0), Field(100.0), seed=seed, accuracy={"drift_velocity_flux": 0.2}, state=run.state())
    assert list(again.result().estimates) == list(point.estimates)
