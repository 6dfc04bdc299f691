"""Many points over one executor: equal bits, interruption, clocks."""

from concurrent.futures import ProcessPoolExecutor, ThreadPoolExecutor
from multiprocessing import get_context

import pytest

from swarm.test_point_run import same
from swarmgauge.gas import InputError, Mixture
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.point_run import PointRun
from swarmgauge.swarm.schedule import drive, simulate

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
