"""Bars on the error stream: the points, and the accuracy that the point in work has reached."""

import math
import sys
import time
from collections.abc import Callable
from types import TracebackType
from typing import TextIO

from tqdm import tqdm

from swarmgauge.swarm.point_run import PointRun

from .console import WIDTH

_WIDEST_TEXT = 62  # of the lower bar: 18 columns are left to the bar
_SECONDS_BETWEEN_LOOKS = 0.3  # what a point has reached is some milliseconds' work to find out


class Bars:
    """Two bars of one campaign; to be used as a context, so that the lines below stay clean.

    The upper one tells the time that the campaign still needs. The lower one tells, of the point that has just got on,
    the quantity furthest from its target, its error, what was asked for, and the time that is left; it fills with the
    work done for it, (target/error)^2, since errors fall with the root of the work.
    """

    def __init__(self, shown: bool = True, stream: TextIO | None = None) -> None:
        self._stream = stream or sys.stderr
        self._disable = None if shown else True  # None: tqdm shows bars on a terminal only
        self._points: tqdm | None = None
        self._accuracy: tqdm | None = None
        self._next_look = 0.0
        self._workers = 1
        self._time_left: Callable[[], float] = lambda: math.nan

    def __enter__(self) -> "Bars":
        return self

    def __exit__(
        self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None
    ) -> None:
        for bar in (self._accuracy, self._points):
            if bar is not None:
                bar.close()

    def start(self, points: int, finished: int, workers: int, time_left: Callable[[], float]) -> None:
        """Show the bars. time_left() : seconds until the campaign ends, NaN if unknown."""
        self._workers, self._time_left = workers, time_left
        form = "{desc} {percentage:3.0f}%|{bar}| {n_fmt}/{total_fmt} [{elapsed}{postfix}]"
        self._points = tqdm(
            total=points,
            initial=finished,
            desc="points",
            file=self._stream,
            ncols=WIDTH,
            bar_format=form,
            position=0,
            disable=self._disable,
        )
        self._accuracy = tqdm(
            total=100,
            file=self._stream,
            ncols=WIDTH,
            bar_format="{desc} {percentage:3.0f}%|{bar}|",
            position=1,
            leave=False,
            disable=self._disable,
        )

    def progress(self, run: PointRun) -> None:
        """Show what a point has reached."""
        now = time.monotonic()
        if self._accuracy is None or self._accuracy.disable or now < self._next_look:
            return
        self._next_look = now + _SECONDS_BETWEEN_LOOKS
        self._accuracy.set_description_str(described(run, self._workers), refresh=False)
        _, excess = run.worst
        self._accuracy.n = min(100, int(100 / excess**2)) if excess > 0 else 100
        self._accuracy.refresh()
        if self._points is not None:
            self._points.set_postfix_str(duration(self._time_left()), refresh=True)

    def finished(self, run: PointRun) -> None:
        """Count a point."""
        if self._points is not None:
            self._points.update()


def described(run: PointRun, workers: int) -> str:
    """What a point has reached, in at most 62 columns: 120 Td diffusion_L_times_N_bulk 3.1 % of 2 %, 12 s left."""
    name, _ = run.worst
    estimate, status = run.result().estimates.get(name), run.result().targets.get(name)
    if estimate is None or status is None:
        return f"{run.field.E_over_N_Td:g} Td"
    if math.isnan(estimate.upper_bound) and estimate.value != 0.0:
        reached = f"{100 * estimate.standard_error / abs(estimate.value):.2g} %"
    else:
        reached = f"< {estimate.upper_bound:.1e}"
    end = f" {reached} of {status.target}, {duration(run.seconds_left / workers)}"
    begin = f"{run.field.E_over_N_Td:g} Td "
    room = _WIDEST_TEXT - len(begin) - len(end)
    return begin + (name if len(name) <= room else name[: max(room - 1, 0)] + "…") + end


def duration(seconds: float) -> str:
    """Time left in words."""
    if not math.isfinite(seconds):
        return "time left unknown"
    if seconds < 99.5:
        return f"{seconds:.0f} s left"
    if seconds < 99.5 * 60:
        return f"{seconds / 60:.0f} min left"
    return f"{seconds / 3600:.0f} h left" if seconds < 360_000 else "days left"
