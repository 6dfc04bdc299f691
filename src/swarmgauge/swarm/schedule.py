"""Running points: cohorts of many points over one executor."""

import os
import time
from collections.abc import Callable, Mapping, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, ThreadPoolExecutor, wait
from typing import Any

from swarmgauge.gas import Mixture

from .cohort import run_cohort
from .field import Field
from .point import Point
from .point_run import PointRun, prepare

Watch = Callable[[PointRun], None]
PREPARE = -1  # stands for the pilot in the list of work


def drive(
    runs: Sequence[PointRun],
    executor: Executor,
    *,
    workers: int,
    max_minutes: float | None = None,
    on_progress: Watch | None = None,
    on_finished: Watch | None = None,
) -> None:
    """Compute all cohorts that the runs want, in their order, keeping `workers` + 1 pieces of work under way.

    on_progress(run) after every cohort, on_finished(run) once for every run, also for those finished before.
    max_minutes : wall clock for all; what is unfinished then is finished with what it has, if that is enough.
    An exception, Ctrl-C too, cancels what is queued and is raised again; finished runs were handed over before.
    """
    end = None if max_minutes is None else time.monotonic() + 60.0 * max_minutes
    under_way: dict[Future, tuple[PointRun, int]] = {}
    reported: set[int] = set()

    def report() -> None:
        for run in runs:
            if run.finished and id(run) not in reported:
                reported.add(id(run))
                if on_finished:
                    on_finished(run)

    try:
        report()
        while True:
            over = end is not None and time.monotonic() > end
            for run in runs:
                run.check_clock(stop=over)
            report()
            if not over:
                _submit(runs, executor, under_way, workers + 1)
            if not under_way:
                break
            done, _ = wait(under_way, timeout=1.0, return_when=FIRST_COMPLETED)
            for future in done:
                run, index = under_way.pop(future)
                _take(run, index, future)
                if on_progress and run.cohorts > 1:
                    on_progress(run)
            if over:
                for future in [f for f in under_way if f.cancel()]:
                    del under_way[future]
    except BaseException:
        for future in under_way:
            future.cancel()
        raise
    report()


def _submit(runs: Sequence[PointRun], executor: Executor, under_way: dict, most: int) -> None:
    """Fill up with work of the earliest runs."""
    for run in runs:
        if len(under_way) >= most:
            return
        if run.finished:
            continue
        mine = {index for other, index in under_way.values() if other is run}
        if run.pilot is None or run.pilot.plan is None:
            if PREPARE not in mine:
                run.start_clock()
                under_way[executor.submit(prepare, run.mixture, run.field, run.seed, run.rare)] = (run, PREPARE)
            continue
        for index in run.missing():
            if len(under_way) >= most:
                return
            if index not in mine:
                run.start_clock()
                under_way[executor.submit(run_cohort, run.pilot.plan, index)] = (run, index)


def _take(run: PointRun, index: int, future: Future) -> None:
    if index == PREPARE:
        run.set_pilot(future.result())
    else:
        run.add(index, *future.result())


def simulate(
    mixture: Mixture,
    field: Field,
    *,
    accuracy: Mapping[str, Any] | None = None,
    seed: int = 1,
    workers: int | None = None,
    max_minutes: float = 5.0,
) -> Point:
    """Swarm coefficients and energy distribution of a mixture at one field.

    accuracy : quantity name (with *) to a relative standard error, or to {rel, abs, from_Td, to_Td}; the defaults are
    in `targets`. seed : of the random streams; equal seeds give equal bits for any number of workers. workers :
    threads, by default the cores of this process. max_minutes : wall clock; what it stops short is "target missed".
    Raises InputError for impossible conditions or targets.
    """
    run = PointRun(mixture, field, seed=seed, accuracy=accuracy, max_minutes=max_minutes)
    count = workers or len(os.sched_getaffinity(0))
    with ThreadPoolExecutor(count) as executor:
        drive([run], executor, workers=count)
    return run.result()
