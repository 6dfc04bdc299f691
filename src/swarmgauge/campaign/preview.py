"""The preview of a campaign: every point by the two-term solution alone, in seconds and without statistical errors."""

import time
from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from swarmgauge.swarm.plan import solved
from swarmgauge.swarm.quantities import in_order, unit_of
from swarmgauge.swarm.two_term import TwoTerm

from .campaign import usable_cores
from .console import preview_table, wrapped
from .results import CONDITION_COLUMNS, condition_cells, csv_text, short
from .runfile import Conditions, RunFile
from .store import ResultsFolder
from .summary import conditions_json, point_key_of

PREVIEW = "preview.csv"
_COLUMNS = (*CONDITION_COLUMNS, "quantity", "two_term", "unit")


@dataclass(frozen=True, eq=False)
class Preview:
    """What a preview found: the folder, and key, conditions and two-term solution of every point."""

    folder: Path
    points: list[tuple[str, Conditions, TwoTerm]]
    wall_seconds: float


def run_preview(run_file: RunFile, folder: str | Path, *, workers: int | None = None) -> Preview:
    """Solve all points of a run file and write preview.csv; what a run has left in the folder is not touched.

    workers : threads; the usable cores. Raises FolderError and OSError as a run does.
    """
    begin = time.monotonic()
    store = ResultsFolder(folder)
    with store.lock(), ThreadPoolExecutor(workers or usable_cores()) as executor:
        points = []
        solutions = executor.map(lambda point: solved(point.mixture, point.field), run_file.points)
        for point, solution in zip(run_file.points, solutions, strict=True):
            points.append((point_key_of(point, run_file), point, solution))
        store.write(PREVIEW, csv_text(_COLUMNS, (row for point in points for row in _rows(*point))))
    return Preview(store.path, points, time.monotonic() - begin)


def _rows(key: str, point: Conditions, solution: TwoTerm) -> Iterator[list[Any]]:
    for name in in_order(solution.values):
        # Six digits: the last bits of linear algebra differ between processors.
        value = float(f"{solution.values[name]:.6g}")
        yield [short(key), *condition_cells(point.mixture, point.field), name, value, unit_of(name)]


def preview_lines(preview: Preview) -> Iterator[str]:
    """The table, and where the values are."""
    yield from preview_table([(point.mixture, point.field, solution.values) for _, point, solution in preview.points])
    unsolved = list(
        dict.fromkeys(point.field.E_over_N_Td for _, point, solution in preview.points if not solution.converged)
    )
    if unsolved:
        shown = ", ".join(f"{field:g}" for field in unsolved[:8])
        yield from wrapped(f"~ {shown} Td: the solution has not converged; these values are worth little")
    count = len(preview.points)
    yield from wrapped(
        f"{count} point{'s' if count > 1 else ''}, {preview.wall_seconds:.1f} s. Written: {PREVIEW}. "
        "Without --preview the same command computes them by Monte Carlo."
    )
    yield f"{preview.folder}"


def preview_json(preview: Preview) -> dict[str, Any]:
    """The same for programs."""
    return {
        "folder": str(preview.folder),
        "method": "two-term",
        "points": [
            {"point": short(key), **conditions_json(point), "two_term": dict(solution.values)}
            for key, point, solution in preview.points
        ],
    }
