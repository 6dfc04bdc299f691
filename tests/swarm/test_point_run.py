"""A point under way: when it is judged, how it is stopped, and that it goes on from its state."""

import math

import numpy as np
import pytest

from swarmgauge.gas import Mixture
from swarmgauge.swarm import point_key
from swarmgauge.swarm.cohort import run_cohort
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.pilot import Pilot
from swarmgauge.swarm.point_run import PointRun, prepare

RAMP = Mixture({"model-ramp": 1.0})
FIELD = Field(24.0)


@pytest.fixture(scope="module")
def flown():
    """The pilot of the ramp model at 24 Td and the sums of its first 80 cohorts."""
    pilot = prepare(RAMP, FIELD, 1)
    return pilot, [run_cohort(pilot.plan, index) for index in range(80)]


def fed(flown, count, accuracy=None, **options):
    """A run that was given its first cohorts."""
    run = PointRun(RAMP, FIELD, seed=1, accuracy=accuracy, **options)
    run.set_pilot(flown[0])
    for index in range(count):
        run.add(index, *flown[1][index])
    return run


def same(a, b):
    """Whether two points are equal to the last bit, but for the clock."""
    assert list(a.estimates) == list(b.estimates)
    for name, estimate in a.estimates.items():
        other = b.estimates[name]
        assert (estimate.value, estimate.samples, estimate.unit) == (other.value, other.samples, other.unit)
        np.testing.assert_equal(estimate.standard_error, other.standard_error)
        np.testing.assert_equal(estimate.upper_bound, other.upper_bound)
    for name in ("energy_edges_eV", "f0", "f0_standard_error", "f1", "f1_standard_error"):
        np.testing.assert_array_equal(getattr(a.eedf, name), getattr(b.eedf, name))
    for name in ("status", "cohorts", "worst", "warnings", "two_term", "targets", "relaxation", "above_tables"):
        assert getattr(a, name) == getattr(b, name), name


def test_nothing_is_wanted_before_the_pilot(flown):
    run = PointRun(RAMP, FIELD)
    assert run.missing() == []
    assert not run.finished
    assert run.worst[0] == ""
    assert math.isnan(run.worst[1])
    assert run.result().status == "interrupted"
    assert run.result().estimates == {}
    run.set_pilot(flown[0])
    assert run.missing() == list(range(20))


def test_a_point_is_judged_at_20_40_and_80_cohorts_only(flown):
    reached = {n: fed(flown, n, {"drift_velocity_flux": 1e-7}).result()["drift_velocity_flux"] for n in (20, 40, 80)}
    relative = {n: e.standard_error / e.value for n, e in reached.items()}
    for stop, others in ((20, ()), (40, (20,)), (80, (20, 40))):
        target = relative[stop] * 1.000001
        assert all(relative[n] > target for n in others), "errors of this seed do not fall: choose another"
        run = fed(flown, 0, {"drift_velocity_flux": target})
        for index in range(stop):
            assert not run.finished
            run.add(index, *flown[1][index])
        assert run.finished
        assert run.result().status == "done"
        assert run.result().cohorts == stop
        assert run.result().worst == ("drift_velocity_flux", pytest.approx(1.0, rel=1e-5))
        assert run.missing() == []


def test_a_missed_target_asks_for_as_many_again(flown):
    run = fed(flown, 20, {"drift_velocity_flux": 1e-7})
    assert run.missing() == list(range(20, 40))
    for index in range(39, 19, -1):  # in any order
        assert not run.finished
        run.add(index, *flown[1][index])
    assert run.missing() == list(range(40, 80))
    assert run.cohorts == 40
    assert run.result().status == "interrupted"


def test_only_cohorts_without_a_gap_count(flown):
    run = fed(flown, 10)
    run.add(15, *flown[1][15])
    assert run.cohorts == 10
    assert run.result().cohorts == 10
    assert 15 not in run.missing()
    same(run.result(), fed(flown, 10).result())


def test_results_do_not_depend_on_the_order_of_arrival(flown):
    run = fed(flown, 0)
    for index in np.random.default_rng(1).permutation(20):
        run.add(int(index), *flown[1][index])
    same(run.result(), fed(flown, 20).result())


@pytest.mark.parametrize("kept", [7, 20, 33, 40])
def test_a_state_goes_on_with_equal_bits(flown, kept):
    accuracy = {"drift_velocity_flux": 1e-7}
    before = fed(flown, kept, accuracy)
    state = before.state()
    assert state["sums"].shape[0] == kept
    after = PointRun(RAMP, FIELD, seed=1, accuracy=accuracy, state=state)
    assert after.key == before.key
    assert after.cpu_seconds == before.cpu_seconds
    same(after.result(), before.result())
    straight = fed(flown, 80, accuracy)
    plan = after.pilot.plan
    for index in after.missing():
        after.add(index, *run_cohort(plan, index)) if index < 42 else after.add(index, *flown[1][index])
    while after.cohorts < 80:
        for index in after.missing():
            after.add(index, *flown[1][index])
    same(after.result(), straight.result())


def test_a_looser_target_is_met_by_what_is_there(flown):
    state = fed(flown, 40, {"drift_velocity_flux": 1e-7}).state()
    loose = PointRun(RAMP, FIELD, seed=1, accuracy={"drift_velocity_flux": 0.1}, state=state)
    assert loose.finished
    assert loose.result().status == "done"
    assert loose.result().cohorts == 40
    tight = PointRun(RAMP, FIELD, seed=1, accuracy={"drift_velocity_flux": 1e-7}, state=state)
    assert not tight.finished
    assert tight.missing() == list(range(40, 80))


def test_an_empty_state_begins_anew(flown):
    state = PointRun(RAMP, FIELD).state()
    run = PointRun(RAMP, FIELD, state=state)
    assert run.pilot is None
    assert not run.finished


@pytest.mark.parametrize("outcome", ["runaway", "extinct"])
def test_no_steady_swarm(outcome):
    run = PointRun(RAMP, FIELD)
    run.set_pilot(Pilot(None, outcome, np.array([1.0, 2.0]), "because"))
    assert run.finished
    again = PointRun(RAMP, FIELD, state=run.state())
    assert again.finished
    for point in (run.result(), again.result()):
        assert point.status == outcome
        assert point.estimates == {}
        assert point.warnings == (f"{outcome}: because; no coefficients are given",)


def test_the_clock_stops_a_point(flown):
    run = fed(flown, 3, {"drift_velocity_flux": 1e-7}, max_minutes=0.0)
    assert not run.finished  # three cohorts give no error worth stating
    run.add(3, *flown[1][3])
    assert run.finished
    point = run.result()
    assert point.status == "target missed"
    assert point.cohorts == 4
    assert point.wall_seconds > 0
    assert point.warnings == ("only 4 of at least 20 cohorts: errors are rough; allow more minutes",)


def test_the_clock_of_a_point_is_its_share_of_the_workers(flown):
    run = fed(flown, 0, {"drift_velocity_flux": 1e-7}, max_minutes=1.0)
    sums = [pair[0] for pair in flown[1]]
    for index in range(5):
        run.add(index, sums[index], 23.0, workers=2)
        assert not run.finished
    run.add(5, sums[5], 23.0, workers=2)  # 69 s at two workers
    assert run.finished
    assert run.result().wall_seconds == 69.0
    assert run.result().cpu_seconds == 138.0
    again = PointRun(RAMP, FIELD, accuracy={"drift_velocity_flux": 1e-7}, max_minutes=1.0, state=run.state())
    again.add(6, sums[6], 60.0, workers=2)
    assert not again.finished  # a new call has a new clock


def test_the_time_left_follows_the_error(flown):
    run = fed(flown, 20, {"drift_velocity_flux": 1e-7})
    excess = run.worst[1]
    cost = run.cpu_seconds / 20
    for factor, total in ((0.9, 20), (1.3, 40), (2.7, 160)):
        wanted = {"drift_velocity_flux": 1e-7 * excess / factor}
        left = fed(flown, 20, wanted).seconds_left
        assert left == pytest.approx((total - 20) * cost, rel=1e-9)
    assert math.isnan(fed(flown, 1).seconds_left)


def test_the_clock_of_the_campaign_stops_a_point(flown):
    run = fed(flown, 25, {"drift_velocity_flux": 1e-7}, max_minutes=100.0)
    assert not run.finished
    assert run.stop()
    assert run.finished
    assert not run.stop()
    assert run.result().status == "target missed"
    assert run.result().cohorts == 25
    assert run.result().warnings == ()


def test_time_above_the_end_of_a_table_is_told(seed):
    mixture = Mixture({"carbon-monoxide-land1978": 1.0})  # its excitations end at 100 eV
    run = PointRun(mixture, Field(1500.0), seed=seed)
    run.set_pilot(prepare(mixture, Field(1500.0), seed))
    for index in range(4):
        run.add(index, *run_cohort(run.pilot.plan, index))
    point = run.result()
    edges = point.eedf.energy_edges_eV
    shares = point.eedf.f0 * np.diff(edges**1.5 / 1.5)
    (gas,) = mixture.gases
    for process in gas.processes:
        share = point.above_tables.get(f"{gas.name}/{process.id}", 0.0)
        above = float(shares[edges[:-1] >= process.end_eV].sum())
        assert share == pytest.approx(above, rel=0.03, abs=1e-4)  # bins of 1.6 %
    assert point.above_tables[f"{gas.name}/a1pi"] > 1e-3
    assert any(line.startswith("time spent above the end of a table: ") for line in point.warnings)


def test_keys_follow_what_acts():
    key = point_key(RAMP, FIELD, 1)
    assert len(key) == 32
    assert key == point_key(Mixture({"model-ramp": 1.0}), Field(24.0), 1)
    others = [
        point_key(RAMP, FIELD, 2),
        point_key(RAMP, Field(24.1), 1),
        point_key(Mixture({"model-ramp": 1.0}, temperature_K=1.0), FIELD, 1),
        point_key(Mixture({"model-hard-sphere": 1.0}), FIELD, 1),
        point_key(Mixture({"model-ramp": 0.5, "model-hard-sphere": 0.5}), FIELD, 1),
    ]
    assert len({key, *others}) == 6
