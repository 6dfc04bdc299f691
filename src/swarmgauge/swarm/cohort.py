"""One cohort: the kernel run of a plan, reduced to a row of sums."""

import time
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from swarmgauge.kernel.cohort import (
    EXTINCT,
    FULL,
    RUNNING,
    SERIES_ALIVE,
    SERIES_COLUMNS,
    SERIES_ENERGY,
    SERIES_TIME,
    SERIES_Z,
    Workspace,
    compiled_windows,
    new_workspace,
)
from swarmgauge.kernel.history import LAG_SUMS, POINT_SUMS
from swarmgauge.kernel.lookup import LAB_CELLS, SPEED_CELLS, speed_edges
from swarmgauge.kernel.start import launch
from swarmgauge.kernel.streams import cohort_start

from .plan import Plan
from .recoil import recoil_on_cells

FLIGHTS_PER_CALL = 1e7  # a kernel call lasts some tenths of a second, so that Ctrl-C is heard
MOST_STEPS = 10**8


class CohortFailure(RuntimeError):
    """A cohort that could not be finished; its argument says why."""


@dataclass(frozen=True)
class SumsLayout:
    """Where things stand in the row of sums of a cohort.

    lags : windows in a history; processes : acting and then passive; gases : number of gases.
    """

    lags: int
    processes: int
    gases: int

    @cached_property
    def slices(self) -> dict[str, slice]:
        """Name to columns; `lag` holds LAG_SUMS rows of `lags`."""
        sizes = {
            "time": 1,
            "energy": 1,
            "z_time": 1,
            "point": POINT_SUMS,
            "flights": 4,
            "alive": 1,
            "windows": 1,
            "rate": self.processes,
            "above_end": self.processes,
            "recoil": self.processes,
            "warm_recoil": self.gases,
            "attached_energy": self.processes,
            "lab": 2 * LAB_CELLS,
            "lag": LAG_SUMS * self.lags,
        }
        ends = np.cumsum(list(sizes.values()))
        return {name: slice(int(end) - size, int(end)) for (name, size), end in zip(sizes.items(), ends, strict=True)}

    @property
    def columns(self) -> int:
        """Length of a row."""
        return self.slices["lag"].stop


def layout_of(plan: Plan) -> SumsLayout:
    """Layout of the sums of a plan's cohorts."""
    return SumsLayout(plan.lags, len(plan.curves) + len(plan.passive_curves), len(plan.mixture.gases))


class CohortRun:
    """A cohort under way: its arrays, and windows run in calls of bounded length."""

    def __init__(self, plan: Plan, index: int) -> None:
        self.plan = plan
        tables = plan.tables
        self.work: Workspace = new_workspace(plan.lanes, plan.lags, len(plan.mixture.gases), len(tables.kind))
        start = cohort_start(plan.seed, plan.stream_key, index)
        launch(self.work.rows, start, plan.electrons, plan.lanes, plan.start_edges_eV, plan.start_cumulated)
        self._kernel = compiled_windows(
            plan.lanes, len(plan.mixture.gases), plan.thermal, plan.upkeep, plan.angular, plan.tilted
        )
        self.work.population[0] = plan.electrons

    def windows(self, count: int, measuring: bool, flights_per_window: float = 0.0) -> np.ndarray:
        """Run `count` windows; returns their series, (count, SERIES_COLUMNS). Raises CohortFailure."""
        plan = self.plan
        series = np.zeros((count, SERIES_COLUMNS))
        at_once = max(1, int(FLIGHTS_PER_CALL / max(flights_per_window, FLIGHTS_PER_CALL / 64)))
        for first in range(0, count, at_once):
            part = np.zeros((min(at_once, count - first), SERIES_COLUMNS))
            status = self._kernel(
                plan.tables,
                self.work,
                part,
                plan.electrons,
                plan.lags,
                plan.window_time,
                plan.acceleration,
                plan.alpha,
                measuring,
                MOST_STEPS,
            )
            series[first : first + len(part)] = part
            if status != RUNNING:
                raise CohortFailure({FULL: "growth", EXTINCT: "extinct"}.get(status, "stuck"))
            if len(part) % 2:
                self.work = self.work._replace(history=self.work.other_history, other_history=self.work.history)
        return series

    def clear_sums(self) -> None:
        """Forget what was summed so far."""
        work = self.work
        for sums in (
            work.histogram,
            work.lab_histogram,
            work.recoil,
            work.lag_sums,
            work.point_sums,
            work.counts,
            work.events,
        ):
            sums[:] = 0


def run_cohort(plan: Plan, index: int) -> tuple[np.ndarray, float]:
    """Sums of one cohort, (columns,), and the CPU seconds that it took. A pure function of plan and index.

    Where steady-state Townsend quantities are asked for, the sums of a tilted cohort of the same index follow.
    """
    begin = time.thread_time()
    sums = _flown(plan, index)
    if plan.spatial is not None:
        sums = np.concatenate([sums, _flown(plan.tilted_plan, index)])
    return sums, time.thread_time() - begin


def _flown(plan: Plan, index: int) -> np.ndarray:
    run = CohortRun(plan, index)
    if plan.relaxation_windows:
        run.windows(plan.relaxation_windows, False)
    run.clear_sums()
    return reduced(plan, run.work, run.windows(plan.measured_windows, True))


def serial_sum(values: np.ndarray) -> np.ndarray:
    """Sums along the last axis, strictly one after the other: numpy's own order depends on the processor."""
    return np.cumsum(values, axis=-1)[..., -1]


def reduced(plan: Plan, work: Workspace, series: np.ndarray) -> np.ndarray:
    """The row of sums of a cohort; see SumsLayout. In a tilted cohort the time is that of the candidates, tilted."""
    layout = layout_of(plan)
    row = np.zeros(layout.columns)
    at = layout.slices
    row[at["time"]] = serial_sum(series[:, SERIES_TIME])
    row[at["energy"]] = serial_sum(series[:, SERIES_ENERGY])
    row[at["z_time"]] = serial_sum(series[:, SERIES_Z])
    row[at["alive"]] = serial_sum(series[:, SERIES_ALIVE])
    row[at["windows"]] = len(series)
    row[at["point"]] = work.point_sums
    row[at["flights"]] = work.counts
    row[at["lab"]] = work.lab_histogram
    if plan.tilted:
        row[at["time"]] = serial_sum(work.lab_histogram[::2])
    row[at["lag"]] = work.lag_sums
    histogram = work.histogram.reshape(len(plan.mixture.gases), SPEED_CELLS, 2)
    upper = histogram[:, :, 1]
    lower = histogram[:, :, 0] - upper
    edges = speed_edges()
    middle_energy = (0.5 * (edges[:-1] + edges[1:])) ** 2
    for column, curve in enumerate(plan.curves + plan.passive_curves):
        visits = curve.low * lower[curve.gas] + curve.high * upper[curve.gas]
        row[at["rate"].start + column] = serial_sum(visits)
        above = edges[:-1] >= np.sqrt(min(curve.process.end_eV, 1e12))
        if curve.superelastic:  # above the end of a table whenever its forward process is
            continue
        row[at["above_end"].start + column] = serial_sum(np.where(above, histogram[curve.gas, :, 0], 0.0))
        if curve.process.kind == "attachment":
            row[at["attached_energy"].start + column] = serial_sum(visits * middle_energy)
    warm = plan.mixture.temperature_K > 0.0
    for column, curve in enumerate(plan.curves):
        if not (warm and curve.process.kind == "elastic"):
            given = recoil_on_cells(plan, curve, lower[curve.gas], upper[curve.gas])
            row[at["recoil"].start + column] = serial_sum(given)
    if warm:
        row[at["warm_recoil"]] = work.recoil
    return row
