"""Many points over one executor: equal bits, interruption, clocks."""

import math
from concurrent.futures import ProcessPoolExecutor, ThreadPoolExecutor
from multiprocessing import get_context

import pytest

from swarm.test_point_run import same
from swarmgauge.gas import InputError, Mixture
from swarmgauge.swarm.cohort import CohortFailure, run_cohort
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.point_run import PointRun, prepare
from swarmgauge.swarm.schedule import PREPARE, _Work, drive, seconds_left, simulate

LOOSE = {"mean_energy": 0.1}


def runs(seed, accuracy=None):
    mixture = Mixture({"model-constant-growth": 0.5, "model-ramp": 0.5})
    pairs = [(Mixture({"model-ramp": 1.0}), Field(10.0)), (mixture, Field(24.0))]
    return [PointRun(mixture, field, seed=seed, accuracy=accuracy or LOOSE) for mixture, field in pairs]


def driven(executor, workers, seed):
    mine = runs(seed)
    finished = []
    with executor:
        drive(mine, executor, workers=workers, on_finished=finished.append)
    assert sorted(map(id, finished)) == sorted(map(id, mine))  # each once
    return [run.result() for run in mine]


@pytest.fixture(scope="module")
def reference():
    return driven(ThreadPoolExecutor(1), 1, 1)


@pytest.mark.parametrize("workers", [2, 4])
def test_equal_bits_for_any_number_of_threads(reference, workers):
    for a, b in zip(reference, driven(ThreadPoolExecutor(workers), workers, 1), strict=True):
        same(a, b)
    assert all(point.status == "done" for point in reference)
    assert all(point.cohorts == 20 for point in reference)


def test_equal_bits_for_processes(reference):
    executor = ProcessPoolExecutor(2, mp_context=get_context("spawn"))
    for a, b in zip(reference, driven(executor, 2, 1), strict=True):
        same(a, b)


def test_another_seed_is_another_swarm(reference):
    other = simulate(Mixture({"model-ramp": 1.0}), Field(10.0), accuracy=LOOSE, seed=2)
    assert other["mean_energy"].value != reference[0]["mean_energy"].value


def test_simulate_is_one_point_of_a_campaign(reference):
    same(reference[0], simulate(Mixture({"model-ramp": 1.0}), Field(10.0), accuracy=LOOSE, seed=1, workers=2))


def test_an_interruption_is_raised_again_and_leaves_nothing_queued():
    mine = runs(1)
    finished, seen = [], []

    def interrupt(run):
        seen.append(run)
        if len(seen) == 25:
            raise KeyboardInterrupt

    with ThreadPoolExecutor(2) as executor:
        with pytest.raises(KeyboardInterrupt):
            drive(mine, executor, workers=2, on_progress=interrupt, on_finished=finished.append)
        assert executor._work_queue.qsize() == 0
    assert finished == [mine[0]]  # what was done had been handed over
    assert len(seen) == 25
    assert mine[1].cohorts >= 1


def test_an_error_in_a_cohort_is_raised(monkeypatch):
    def broken(plan, index):
        raise MemoryError("no room")

    monkeypatch.setattr("swarmgauge.swarm.schedule.run_cohort", broken)
    with pytest.raises(MemoryError, match="no room"), ThreadPoolExecutor(2) as executor:
        drive(runs(1), executor, workers=2)


def test_a_cohort_that_fails_makes_its_point_begin_anew_with_shorter_windows(monkeypatch):
    long_windows = prepare(Mixture({"model-ramp": 1.0}), Field(10.0), 1).plan.window_time

    def failing(plan, index):
        if plan.window_time == long_windows and index == 7:
            raise CohortFailure("growth")
        return run_cohort(plan, index)

    monkeypatch.setattr("swarmgauge.swarm.schedule.run_cohort", failing)
    results = []
    for workers in (1, 2):
        mine = runs(1)
        with ThreadPoolExecutor(workers) as executor:
            drive(mine, executor, workers=workers)
        results.append([run.result() for run in mine])
        assert mine[0].pilot.plan.window_time == long_windows / 4
        assert mine[0].failures == 1
        assert mine[1].failures == 0
    for a, b in zip(*results, strict=True):
        same(a, b)
        assert a.status == "done"
    state = mine[0].state()
    again = PointRun(mine[0].mixture, mine[0].field, seed=1, accuracy=LOOSE, state=state)
    assert again.failures == 1
    same(again.result(), results[0][0])


def test_a_point_whose_cohorts_always_fail_does_not_stop_the_others(monkeypatch):
    mine = runs(1)

    def failing(plan, index):
        if plan.field.E_over_N_Td == 10.0:
            raise CohortFailure("extinct")
        return run_cohort(plan, index)

    monkeypatch.setattr("swarmgauge.swarm.schedule.run_cohort", failing)
    with ThreadPoolExecutor(2) as executor:
        drive(mine, executor, workers=2)
    first, second = (run.result() for run in mine)
    assert first.status == "extinct"
    assert "a cohort failed" in first.warnings[0]
    assert not first.estimates
    assert second.status == "done"


def test_the_clock_of_the_campaign(monkeypatch):
    mine = runs(1, {"mean_energy": 1e-7})

    class Clock:
        """An hour passes while the first run gets its sixth cohort."""

        @staticmethod
        def monotonic():
            return 3600.0 if mine[0].cohorts >= 6 else 0.0

    monkeypatch.setattr("swarmgauge.swarm.schedule.time", Clock)
    with ThreadPoolExecutor(2) as executor:
        drive(mine, executor, workers=2, max_minutes=6 / 60)
    assert mine[0].result().status == "target missed"
    assert mine[0].result().cohorts >= 6
    assert mine[-1].result().status == "interrupted"
    assert not mine[-1].finished


def test_the_clock_of_a_point():
    point = simulate(Mixture({"model-ramp": 1.0}), Field(10.0), accuracy={"mean_energy": 1e-7}, max_minutes=4 / 60)
    assert point.status == "target missed"
    assert point.cohorts >= 4
    assert point.worst[0] == "mean_energy"
    assert point.worst[1] > 1.0
    assert point.wall_seconds < 60


def test_finished_runs_are_handed_over_without_work():
    first = runs(1)[:1]
    with ThreadPoolExecutor(1) as executor:
        drive(first, executor, workers=1)
    again = PointRun(first[0].mixture, first[0].field, seed=1, accuracy=LOOSE, state=first[0].state())
    finished, progress = [], []
    with ThreadPoolExecutor(1) as executor:
        drive([again], executor, workers=1, on_finished=finished.append, on_progress=progress.append)
    assert finished == [again]
    assert progress == []
    same(again.result(), first[0].result())


@pytest.mark.parametrize(("field", "said"), [(-1.0, "-1"), (float("nan"), "nan"), (float("inf"), "inf")])
def test_impossible_fields(field, said):
    with pytest.raises(InputError, match=said):
        Field(field)


@pytest.mark.parametrize("more", [{"B_over_N_Hx": 100.0}, {"angular_frequency_over_N": 1e-15}])
def test_fields_that_do_not_act_yet_are_refused(more):
    with pytest.raises(InputError, match=next(iter(more))):
        Field(10.0, **more)


def test_no_field_and_no_temperature():
    with pytest.raises(InputError, match="temperature_K = 0"):
        simulate(Mixture({"model-ramp": 1.0}), Field(0.0), accuracy=LOOSE)


class FakeRun:
    """A run that wants 20 cohorts and then some more."""

    def __init__(self, name, left):
        self.name, self.left = name, left
        self.pilot, self.finished, self.cohorts, self.cpu_seconds_now = None, False, 0, 0.0

    @property
    def seconds_left(self):
        return self.left if self.cohorts >= 20 else math.nan

    def missing(self):
        return list(range(self.cohorts, 20 if self.cohorts < 20 else 40))


def test_first_cohorts_in_order_then_the_longest_point_first():
    names = {"a": 1.0, "b": 9.0, "c": 5.0}
    work = _Work([FakeRun(name, left) for name, left in names.items()])
    given = []
    for _ in range(3):  # nothing but pilots can be begun
        run, index = work.next_piece()
        given.append((run.name, index))
        run.pilot = "there"
    assert given == [("a", PREPARE), ("a", 0), ("a", 1)]
    order = []
    while len(order) < 80:
        run, index = work.next_piece()
        run.pilot = "there"
        if index != PREPARE:
            run.cohorts = max(run.cohorts, index + 1)
        order.append(run.name)
    assert "".join(order) == "a" * 18 + "b" * 21 + "c" * 21 + "b" * 20


def test_points_not_opened_count_as_the_mean_of_the_others():
    runs = [FakeRun(name, left) for name, left in (("a", 10.0), ("b", 30.0), ("c", 0.0), ("d", 0.0))]
    assert math.isnan(seconds_left(runs, 2))
    for run in runs[:2]:
        run.cohorts, run.cpu_seconds_now = 20, 5.0
    # left 10 + 30; a point costs (40 + 5 + 5) / 2 in all, and two are not opened; two workers
    assert seconds_left(runs, 2) == (40.0 + 2 * 25.0) / 2


def test_a_campaign_that_runs_out_of_time_has_something_of_every_point(monkeypatch):
    mine = runs(1, {"mean_energy": 1e-7})

    class Clock:
        """An hour passes once the last run has its 22nd cohort."""

        @staticmethod
        def monotonic():
            return 3600.0 if mine[-1].cohorts >= 22 else 0.0

    monkeypatch.setattr("swarmgauge.swarm.schedule.time", Clock)
    with ThreadPoolExecutor(2) as executor:
        drive(mine, executor, workers=2, max_minutes=1.0)
    assert all(run.result().status == "target missed" for run in mine)
    assert all(run.cohorts >= 20 for run in mine)
