"""Which process a coefficient hangs on, for all points of a run file: a table of its folder and lines of a terminal."""

from collections.abc import Iterator
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass
from itertools import groupby
from pathlib import Path
from typing import Any

from swarmgauge.campaign.campaign import usable_cores
from swarmgauge.campaign.console import describe, field_text, wrapped
from swarmgauge.campaign.results import CONDITION_COLUMNS, condition_cells, csv_text, short
from swarmgauge.campaign.runfile import Conditions, RunFile
from swarmgauge.campaign.store import ResultsFolder
from swarmgauge.campaign.summary import point_key_of
from swarmgauge.swarm.two_term_sensitivity import two_term_sensitivities

SENSITIVITY = "sensitivity.csv"
COLUMNS = (*CONDITION_COLUMNS, "quantity", "process", "sensitivity", "standard_error", "method")
SHOWN = ("drift_velocity_flux", "mean_energy")  # in the lines of a terminal
_HEADS = {"drift_velocity_flux": "W flux hangs on", "mean_energy": "energy hangs on"}
_STRONGEST = 2
_MOST_ROWS = 20
_WIDTH = 34


@dataclass(frozen=True, eq=False)
class PointSensitivity:
    """One point: its key and conditions, and process to quantity to d ln(quantity) / d ln(cross section)."""

    key: str
    conditions: Conditions
    values: dict[str, dict[str, float]]

    def strongest(self, quantity: str, count: int) -> list[tuple[str, float]]:
        """The processes on which a quantity hangs most, and how."""
        pairs = [(process, values[quantity]) for process, values in self.values.items() if quantity in values]
        return sorted(pairs, key=lambda pair: -abs(pair[1]))[:count]


@dataclass(frozen=True, eq=False)
class Sensitivity:
    """All points of a run file, in its order, and the folder where they are written."""

    folder: Path
    points: list[PointSensitivity]


def run_sensitivity(run_file: RunFile, folder: str | Path, *, workers: int | None = None) -> Sensitivity:
    """Two-term derivatives at all points of a run file; writes sensitivity.csv into the folder.

    workers : threads; the usable cores. Raises FolderError and OSError as a run does.
    """
    store = ResultsFolder(folder)
    with store.lock(), ThreadPoolExecutor(workers or usable_cores()) as executor:
        solved = executor.map(lambda at: two_term_sensitivities(at.mixture, at.field.E_over_N_Td), run_file.points)
        points = [
            PointSensitivity(point_key_of(at, run_file), at, values)
            for at, values in zip(run_file.points, solved, strict=True)
        ]
        store.write(SENSITIVITY, csv_text(COLUMNS, (row for point in points for row in _rows(point))))
    return Sensitivity(store.path, points)


def _rows(point: PointSensitivity) -> Iterator[list[Any]]:
    """Four digits: the last bits of linear algebra differ between processors."""
    start = [short(point.key), *condition_cells(point.conditions.mixture, point.conditions.field)]
    for process, values in point.values.items():
        for quantity, value in values.items():
            yield [*start, quantity, process, round(value, 4) + 0.0, None, "two_term"]


def sensitivity_lines(sensitivity: Sensitivity) -> Iterator[str]:
    """For every field the processes on which drift and mean energy hang most, in 80 columns."""
    for _, group in groupby(sensitivity.points, key=lambda point: id(point.conditions.mixture)):
        points = list(group)
        gas = describe(points[0].conditions.mixture)
        yield from wrapped(f"d ln(coefficient) / d ln(cross section), two-term: {gas}")
        yield f"{'E/N':>7}  " + " ".join(_HEADS[name].ljust(_WIDTH) for name in SHOWN).rstrip()
        for point in points[:_MOST_ROWS]:
            cells = (_cell(point, name) for name in SHOWN)
            yield f"{field_text(point.conditions.field):>7}  " + " ".join(c.ljust(_WIDTH) for c in cells).rstrip()
        if len(points) > _MOST_ROWS:
            yield f"and {len(points) - _MOST_ROWS} more fields: {SENSITIVITY}"


def _cell(point: PointSensitivity, quantity: str) -> str:
    one_gas = len(point.conditions.mixture.gases) == 1
    parts = [
        f"{name.partition('/')[2] if one_gas else _short(point, name)} {value:+.2f}"
        for name, value in point.strongest(quantity, _STRONGEST)
    ]
    text = ", ".join(parts)
    return text if len(text) <= _WIDTH else parts[0][:_WIDTH]


def _short(point: PointSensitivity, name: str) -> str:
    """A process with the formula of its gas instead of the name of the set."""
    set_name, _, process = name.partition("/")
    gas = next(gas for gas in point.conditions.mixture.gases if gas.name == set_name)
    return f"{gas.formula}/{process}"


def sensitivity_json(sensitivity: Sensitivity) -> list[dict[str, Any]]:
    """The same for programs."""
    return [
        {"point": short(point.key), "E_over_N_Td": point.conditions.field.E_over_N_Td, "processes": point.values}
        for point in sensitivity.points
    ]
