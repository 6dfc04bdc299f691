"""The points of a run file and the outcome of a campaign, as text or for JSON."""

import math
from collections.abc import Iterator
from itertools import groupby
from pathlib import Path
from typing import Any

from swarmgauge.swarm.estimate import Estimate
from swarmgauge.swarm.point_run import point_key

from .campaign import Outcome
from .console import describe, wrapped
from .results import short
from .runfile import Conditions, RunFile
from .store import ResultsFolder


def points_table(run_file: RunFile, folder: Path) -> Iterator[str]:
    """The points of a run file, and which of them the folder holds."""
    store = ResultsFolder(folder)
    yield from wrapped(f"{folder}: {len(run_file.points)} points; nothing is computed or written now")
    for _, block in groupby(run_file.points, key=lambda point: id(point.mixture)):
        points = list(block)
        yield from wrapped(f"{describe(points[0].mixture)}:")
        for point in points:
            key = point_key_of(point, run_file)
            kept = "there" if store.has(key) else "to do"
            yield f"    {short(key)}  {point.field.E_over_N_Td:>10g} Td  {kept}"


def points_json(run_file: RunFile, folder: Path) -> list[dict[str, Any]]:
    """The points of a run file, and which of them the folder holds."""
    store = ResultsFolder(folder)
    keys = [point_key_of(point, run_file) for point in run_file.points]
    return [
        {"point": key, **conditions_json(point), "there": store.has(key)}
        for key, point in zip(keys, run_file.points, strict=True)
    ]


def outcome_json(outcome: Outcome) -> dict[str, Any]:
    """A campaign's outcome with all its estimates; null where a number is none."""
    return {
        "folder": str(outcome.folder),
        "interrupted": outcome.interrupted,
        "asked": outcome.asked,
        "reused": outcome.reused,
        "set_aside": list(outcome.set_aside),
        "wall_seconds": round(outcome.wall_seconds, 3),
        "points": [
            {
                "point": key,
                **conditions_json(point.conditions),
                "status": point.status,
                "warnings": list(point.warnings),
                "estimates": {name: _estimate(estimate) for name, estimate in point.estimates.items()},
            }
            for key, point in outcome.points.items()
        ],
    }


def point_key_of(point: Conditions, run_file: RunFile) -> str:
    """The key of a point of a run file."""
    return point_key(point.mixture, point.field, run_file.seed, run_file.accuracy)


def conditions_json(point: Any) -> dict[str, Any]:
    """The conditions of a point."""
    mixture = point.mixture
    return {
        "mixture": mixture.describe(),
        "temperature_K": mixture.temperature_K,
        "pressure_Pa": mixture.pressure_Pa,
        "E_over_N_Td": point.field.E_over_N_Td,
    }


def _estimate(estimate: Estimate) -> dict[str, Any]:
    return {
        "value": _or_none(estimate.value),
        "standard_error": _or_none(estimate.standard_error),
        "unit": estimate.unit,
        "upper_bound": _or_none(estimate.upper_bound),
    }


def _or_none(number: float) -> float | None:
    return float(number) if math.isfinite(number) else None
