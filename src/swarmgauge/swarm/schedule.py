"""Running points: cohorts of many points over one executor."""

import math
import os
import time
from collections import deque
from collections.abc import Callable, Mapping, Sequence
from concurrent.futures import FIRST_COMPLETED, Executor, Future, ThreadPoolExecutor, wait
from typing import Any

from swarmgauge.gas import Mixture

from .cohort import CohortFailure, run_cohort
from .field import Field
from .point import Point
from .point_run import FIRST_COHORTS, PointRun, prepare
from .targets import refuse_unknown_processes

Watch = Callable[[PointRun], None]
PREPARE = -1  # stands for the pilot in the list of work
MOST_OPEN = 256  # points under way at once: each holds the sums of its cohorts, half a megabyte and more


def drive(
    runs: Sequence[PointRun],
    executor: Executor,
    *,
    workers: int,
    max_minutes: float | None = None,
    on_progress: Watch | None = None,
    on_finished: Watch | None = None,
) -> None:
    """Compute all cohorts that the runs want, keeping `workers` + 1 pieces of work under way.

    Which piece comes next decides only when the campaign ends, never what comes out; see `_Work`.
    on_progress(run) after every cohort, on_finished(run) once for every run, also for those finished before.
    max_minutes : wall clock for all; what is unfinished then is finished with what it has, if that is enough.
    An exception, Ctrl-C too, cancels what is queued and is raised again; finished runs were handed over before.
    """
    end = None if max_minutes is None else time.monotonic() + 60.0 * max_minutes
    work = _Work(runs)
    under_way: dict[Future, tuple[PointRun, int, int]] = {}

    def hand_over(run: PointRun) -> None:
        if run.finished and on_finished:
            on_finished(run)

    try:
        for run in runs:
            hand_over(run)
        while True:
            over = end is not None and time.monotonic() > end
            if over:
                for run in work.stop():
                    hand_over(run)
            while not over and len(under_way) <= workers and (piece := work.next_piece()):
                run, index = piece
                under_way[_submitted(executor, run, index)] = (run, index, run.failures)
            if not under_way:
                return
            done, _ = wait(under_way, timeout=1.0, return_when=FIRST_COMPLETED)
            for future in done:
                run, index, failures = under_way.pop(future)
                was_finished = run.finished
                if failures == run.failures:  # else of a plan that was given up
                    work.take(run, index, _answer(future), workers)
                if not was_finished:
                    hand_over(run)
                if on_progress and run.cohorts > 1:
                    on_progress(run)
            if over:
                for future in [f for f in under_way if f.cancel()]:
                    del under_way[future]
    except BaseException:
        for future in under_way:
            future.cancel()
        raise


def _submitted(executor: Executor, run: PointRun, index: int) -> Future:
    if index == PREPARE:
        return executor.submit(prepare, run.mixture, run.field, run.seed, run.rare, run.failures, run.spatial)
    assert run.pilot is not None
    assert run.pilot.plan is not None
    return executor.submit(run_cohort, run.pilot.plan, index)


def _answer(future: Future) -> Any:
    """What a piece of work came to; a cohort that failed is an answer too."""
    try:
        return future.result()
    except CohortFailure as failure:
        return failure


class _Work:
    """Which piece comes next, so that the campaign ends soonest and a stopped one has something of every point.

    Points are opened in order and get their first cohorts in order. Then every one that missed its target has an
    estimate of the time it still needs, and the one that needs most goes first: at the end no worker waits while a long
    point, begun too late, crawls through its last rounds.
    """

    def __init__(self, runs: Sequence[PointRun]) -> None:
        self._waiting = deque(run for run in runs if not run.finished)
        self._open: list[PointRun] = []
        self._given: dict[int, set[int]] = {}  # indices under way, by id of the run

    def next_piece(self) -> tuple[PointRun, int] | None:
        """A run and the index of its cohort, or PREPARE; nothing if all that is wanted now is under way."""
        missing = [(run, self._missing(run)) for run in self._open]
        wanted = [(run, indices) for run, indices in missing if indices]
        first = next((pair for pair in wanted if pair[0].cohorts < FIRST_COHORTS), None)
        if first is None and self._waiting and len(self._open) < MOST_OPEN:
            run = self._waiting.popleft()
            self._open.append(run)
            self._given[id(run)] = set()
            first = (run, self._missing(run))
        if first is None and wanted:
            first = max(wanted, key=lambda pair: pair[0].seconds_left)
        if first is None:
            return None
        run, indices = first
        self._given[id(run)].add(indices[0])
        return run, indices[0]

    def _missing(self, run: PointRun) -> list[int]:
        wanted = [PREPARE] if run.pilot is None else run.missing()
        given = self._given[id(run)]
        return [index for index in wanted if index not in given]

    def take(self, run: PointRun, index: int, answer: Any, workers: int) -> None:
        """Hand a run the answer to one of its pieces. A point's clock is its share of the workers' time."""
        self._given[id(run)].discard(index)
        if isinstance(answer, CohortFailure):
            run.fail(str(answer))
            self._given[id(run)].clear()
        elif index == PREPARE:
            run.spend(answer.cpu_seconds, workers)
            run.set_pilot(answer)
        else:
            sums, cpu_seconds = answer
            run.add(index, sums, cpu_seconds, workers)
        if run.finished and run in self._open:
            self._open.remove(run)

    def stop(self) -> list[PointRun]:
        """Finish what can be finished with what it has; returns these runs. Nothing new is begun."""
        self._waiting.clear()
        stopped = [run for run in self._open if run.stop()]
        self._open = [run for run in self._open if not run.finished]
        return stopped


def seconds_left(runs: Sequence[PointRun], workers: int) -> float:
    """Wall clock until all runs are finished, as far as can be told now; NaN before the first estimate.

    Points not yet opened are taken to cost as much as the mean of the others.
    """
    begun = [run for run in runs if run.cpu_seconds_now > 0.0 and math.isfinite(run.seconds_left)]
    if not begun:
        return math.nan
    left = sum(run.seconds_left for run in begun)
    mean = (left + sum(run.cpu_seconds_now for run in begun)) / len(begun)
    unknown = sum(not run.finished for run in runs) - sum(not run.finished for run in begun)
    return (left + unknown * mean) / workers


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
    refuse_unknown_processes(run.targets, [mixture])
    count = workers or len(os.sched_getaffinity(0))
    with ThreadPoolExecutor(count) as executor:
        drive([run], executor, workers=count)
    return run.result()
