"""Bars on the error stream: the points, and the accuracy that the point in work has reached."""

import sys
import time
from types import TracebackType
from typing import TextIO

from tqdm import tqdm

from swarmgauge.swarm.point_run import PointRun

from .console import WIDTH

_SECONDS_BETWEEN_LOOKS = 0.3  # what a point has reached is some milliseconds' work to find out


class Bars:
    """Two bars of one campaign; to be used as a context, so that the lines below stay clean.

    The lower bar fills with the work done for the worst quantity, (target/error)^2, since errors fall with the root of
    the work.
    """

    def __init__(self, shown: bool = True, stream: TextIO | None = None) -> None:
        self._stream = stream or sys.stderr
        self._disable = None if shown else True  # None: tqdm shows bars on a terminal only
        self._points: tqdm | None = None
        self._accuracy: tqdm | None = None
        self._next_look = 0.0

    def __enter__(self) -> "Bars":
        return self

    def __exit__(
        self, kind: type[BaseException] | None, value: BaseException | None, trace: TracebackType | None
    ) -> None:
        for bar in (self._accuracy, self._points):
            if bar is not None:
                bar.close()

    def start(self, points: int, finished: int) -> None:
        """Show the bars."""
        form = "{desc} {percentage:3.0f}%|{bar}| {n_fmt}/{total_fmt} [{elapsed}<{remaining}]"
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
        name, excess = run.worst
        self._accuracy.set_description_str(
            f"{run.field.E_over_N_Td:g} Td, {name}: {excess:.2g} x target", refresh=False
        )
        self._accuracy.n = min(100, int(100 / excess**2)) if excess > 0 else 100
        self._accuracy.refresh()

    def finished(self, run: PointRun) -> None:
        """Count a point."""
        if self._points is not None:
            self._points.update()
