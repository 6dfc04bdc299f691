"""Run a campaign: all points of a run file on all cores, kept as they finish."""

import json
import math
import os
import time
from collections.abc import Callable, Iterator
from concurrent.futures import Executor, ThreadPoolExecutor
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

from swarmgauge.swarm.point import Point
from swarmgauge.swarm.point_run import FIRST_COHORTS, PointRun, point_key
from swarmgauge.swarm.schedule import drive, seconds_left

from .measured import measured_csv
from .provenance import provenance
from .results import COEFFICIENTS, DISTRIBUTIONS, MEASURED, PROVENANCE, coefficients_csv, distributions_csv
from .runfile import RunFile
from .store import ResultsFolder

Watch = Callable[[PointRun], None]


@dataclass(frozen=True, eq=False)
class Outcome:
    """What a campaign came to.

    folder : where it is. points : key to point, in the order of the run file; those that are finished, and after an
    interruption those that have their first round of cohorts, with the status "interrupted".
    asked : number of points asked for. reused : how many were there before. set_aside : damaged point files, each with
    what was wrong. interrupted : by Ctrl-C.
    """

    folder: Path
    points: dict[str, Point]
    asked: int
    reused: int
    set_aside: tuple[str, ...]
    interrupted: bool
    wall_seconds: float

    @property
    def missed(self) -> bool:
        """Whether a point missed a target, has no steady state or was not reached in time."""
        return len(self.points) < self.asked or any(point.status != "done" for point in self.points.values())

    def __repr__(self) -> str:
        state = "interrupted" if self.interrupted else "targets missed" if self.missed else "done"
        return f"Outcome({self.folder}: {len(self.points)} of {self.asked} points, {self.reused} from before; {state})"


def usable_cores() -> int:
    """The cores that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def run_campaign(
    run_file: RunFile,
    folder: str | Path,
    *,
    workers: int | None = None,
    max_minutes: float | None = None,
    executor: Executor | None = None,
    on_start: Callable[[int, int, int, Callable[[], float]], None] | None = None,
    on_progress: Watch | None = None,
    on_finished: Watch | None = None,
) -> Outcome:
    """Compute what is missing in a results folder and write its tables.

    workers : at work at a time; the usable cores. max_minutes : of wall clock, instead of what the run file says.
    executor : where cohorts are computed; threads. on_start(points, finished before, workers, time left), the last a
    function that gives seconds, on_progress(run) and on_finished(run) tell how it goes. Ctrl-C ends it early: what is
    there is kept and counts next time.
    Raises FolderError where the folder is in use or holds other things, OSError where it cannot be written.
    """
    begin = time.monotonic()
    store = ResultsFolder(folder)
    with store.lock():
        runs = [_prepare(run_file, place, store) for place in range(len(run_file.points))]
        before = {run.key for run in runs if run.finished}
        at_work = workers or usable_cores()
        if on_start:
            on_start(len(runs), len(before), at_work, lambda: seconds_left(runs, at_work))

        def keep(run: PointRun) -> None:
            if run.key not in before:
                store.save(run.key, run.state())
                if on_finished:
                    on_finished(run)

        interrupted = False
        with _pool(executor, workers) as pool:
            try:
                drive(
                    runs,
                    pool,
                    workers=at_work,
                    max_minutes=max_minutes or run_file.max_minutes,
                    on_progress=on_progress,
                    on_finished=keep,
                )
            except KeyboardInterrupt:
                interrupted = True
        _keep_unfinished(runs, store)
        enough = FIRST_COHORTS if interrupted else math.inf
        points = {run.key: run.result() for run in runs if run.finished or run.cohorts >= enough}
        wall_seconds = time.monotonic() - begin
        _write_tables(store, run_file, points, wall_seconds)
    return Outcome(
        folder=store.path,
        points=points,
        asked=len(runs),
        reused=len(before),
        set_aside=tuple(store.set_aside),
        interrupted=interrupted,
        wall_seconds=wall_seconds,
    )


@contextmanager
def _pool(executor: Executor | None, workers: int | None) -> Iterator[Executor]:
    """The executor given, left running, or threads of our own: the kernel lets go of the interpreter lock."""
    if executor is not None:
        yield executor
        return
    own = ThreadPoolExecutor(workers or usable_cores(), thread_name_prefix="cohort")
    try:
        yield own
    finally:
        own.shutdown(wait=True, cancel_futures=True)


def _prepare(run_file: RunFile, place: int, store: ResultsFolder) -> PointRun:
    """A point with what the folder holds of it."""
    conditions = run_file.points[place]
    return PointRun(
        conditions.mixture,
        conditions.field,
        seed=run_file.seed,
        accuracy=run_file.accuracy or None,
        max_minutes=run_file.max_minutes_per_point,
        state=store.load(point_key(conditions.mixture, conditions.field, run_file.seed, run_file.accuracy)),
    )


def _keep_unfinished(runs: list[PointRun], store: ResultsFolder) -> None:
    """Cohorts of points under way are worth minutes: kept too."""
    for run in runs:
        if not run.finished and run.cohorts > 0:
            store.save(run.key, run.state())


def _write_tables(store: ResultsFolder, run_file: RunFile, points: dict[str, Point], wall_seconds: float) -> None:
    """Write the tables, their checksums last: a folder that was cut off in between is noticed."""
    files = {
        COEFFICIENTS: coefficients_csv(points.items()),
        DISTRIBUTIONS: distributions_csv(points.items()),
    }
    if run_file.measured is not None:
        files[MEASURED] = measured_csv(run_file.measured)
    for name, text in files.items():
        store.write(name, text)
    origin = provenance(run_file, points.items(), files, wall_seconds)
    store.write(PROVENANCE, json.dumps(origin, indent=1, allow_nan=False) + "\n")
