"""The tables of a results folder: written once a campaign ends, read back by `open_results`."""

import csv
import hashlib
import io
import json
import math
from collections.abc import Iterable, Iterator
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from swarmgauge.gas import InputError, Mixture
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.point import Point

COEFFICIENTS = "coefficients.csv"
DISTRIBUTIONS = "distributions.csv"
MEASURED = "measured.csv"
PROVENANCE = "provenance.json"

# Column to type: text, number (empty is NaN) or count.
CONDITION_COLUMNS: dict[str, type] = {
    "point": str,
    "mixture": str,
    "temperature_K": float,
    "pressure_Pa": float,
    "E_over_N_Td": float,
    "B_over_N_Hx": float,
    "B_angle_deg": float,
    "angular_frequency_over_N": float,
}
COEFFICIENT_COLUMNS: dict[str, type] = {
    **CONDITION_COLUMNS,
    "quantity": str,
    "value": float,
    "standard_error": float,
    "unit": str,
    "samples": int,
    "upper_bound": float,
    "two_term": float,
    "set_error": float,
    "target": str,
    "reached": str,
}
DISTRIBUTION_COLUMNS: dict[str, type] = {
    "point": str,
    "energy_low_eV": float,
    "energy_high_eV": float,
    "f0": float,
    "f0_standard_error": float,
    "f1": float,
    "f1_standard_error": float,
}


class ResultsError(InputError):
    """A results folder that cannot be read."""


def short(key: str) -> str:
    """How tables name a point: the first 8 hex digits of its hash."""
    return key[:8]


def coefficients_csv(points: Iterable[tuple[str, Point]]) -> str:
    """Text of coefficients.csv for (key, point) pairs."""
    return csv_text(COEFFICIENT_COLUMNS, (row for key, point in points for row in _coefficient_rows(key, point)))


def distributions_csv(points: Iterable[tuple[str, Point]]) -> str:
    """Text of distributions.csv for (key, point) pairs."""
    return csv_text(DISTRIBUTION_COLUMNS, (row for key, point in points for row in _distribution_rows(key, point)))


def _coefficient_rows(key: str, point: Point) -> Iterator[list[Any]]:
    start = [short(key), *condition_cells(point.conditions.mixture, point.conditions.field)]
    for name, estimate in point.estimates.items():
        status = point.targets.get(name)
        judged = [None, None] if status is None else [status.target, "yes" if status.reached else "no"]
        value = [float(estimate.value), float(estimate.standard_error), estimate.unit, estimate.samples]
        bound = None if math.isnan(estimate.upper_bound) else float(estimate.upper_bound)
        # Six digits: the last bits of linear algebra differ between processors, those of the file must not.
        two_term = float(f"{point.two_term[name]:.6g}") if name in point.two_term else None
        yield [*start, name, *value, bound, two_term, None, *judged]


def condition_cells(mixture: Mixture, field: Field) -> list[Any]:
    """The cells of CONDITION_COLUMNS but for the first, the point."""
    return [
        mixture.describe(),
        mixture.temperature_K,
        mixture.pressure_Pa,
        field.E_over_N_Td,
        field.B_over_N_Hx,
        field.B_angle_deg,
        field.angular_frequency_over_N,
    ]


def _distribution_rows(key: str, point: Point) -> Iterator[list[Any]]:
    eedf = point.eedf
    edges = eedf.energy_edges_eV.tolist()
    columns = (eedf.f0, eedf.f0_standard_error, eedf.f1, eedf.f1_standard_error)
    for row in zip(edges[:-1], edges[1:], *(column.tolist() for column in columns), strict=True):
        yield [short(key), *row]


def csv_text(columns: Iterable[str], rows: Iterable[list[Any]]) -> str:
    """A table as text: one header row, then the rows."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    writer.writerow(columns)
    writer.writerows(rows)
    return text.getvalue()


def checksum(text: str) -> str:
    """SHA-256 of a text file's bytes, hexadecimal."""
    return hashlib.sha256(text.encode()).hexdigest()


@dataclass(frozen=True, eq=False)
class Results:
    """A results folder, read.

    path : the folder. coefficients, distributions : structured arrays with the columns of the CSV files, one element a
    row. provenance : how it came about.
    """

    path: Path
    coefficients: np.ndarray
    distributions: np.ndarray
    provenance: dict[str, Any]

    def select(self, quantity: str, **where: Any) -> np.ndarray:
        """Rows of `coefficients` of one quantity, by rising E/N; `where` compares further columns.

        results.select("mean_energy", temperature_K=293.15)["value"] is an array. Raises KeyError, with what there is,
        for a quantity that is not there.
        """
        table = self.coefficients
        if quantity not in table["quantity"]:
            raise KeyError(f"{quantity}; there are {', '.join(dict.fromkeys(table['quantity'].tolist()))}")
        chosen = table["quantity"] == quantity
        for column, value in where.items():
            chosen &= table[column] == value
        rows = table[chosen]
        return rows[np.argsort(rows["E_over_N_Td"], kind="stable")]

    @property
    def ratio_to_two_term(self) -> tuple[np.ndarray, np.ndarray]:
        """Monte Carlo over two-term value, and its standard error, for each row of `coefficients`; NaN without one."""
        return ratio_to_two_term(self.coefficients)

    def eedf(self, point: str) -> np.ndarray:
        """Rows of `distributions` of one point, named as in `coefficients`."""
        return self.distributions[self.distributions["point"] == point]

    def __repr__(self) -> str:
        table = self.coefficients
        fields = table["E_over_N_Td"]
        reach = f", {fields.min():g} to {fields.max():g} Td" if len(table) else ""
        mixtures = ", ".join(dict.fromkeys(table["mixture"].tolist()))
        quantities = len(set(table["quantity"].tolist()))
        points = len(set(table["point"].tolist()))
        return f"Results({self.path.name}: {points} points{reach}; {mixtures}; {quantities} quantities)"


def ratio_to_two_term(rows: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Monte Carlo over two-term value, and its standard error, for rows of coefficients; NaN where there is none."""
    known = np.where((rows["two_term"] != 0.0) & np.isnan(rows["upper_bound"]), rows["two_term"], np.nan)
    return rows["value"] / known, rows["standard_error"] / np.abs(known)


def open_results(folder: str | Path) -> Results:
    """Read a results folder.

    Raises ResultsError where it is none, or where a file differs from what the run wrote.
    """
    folder = Path(folder)
    try:
        provenance = json.loads(_read(folder, PROVENANCE))
        written = provenance["files"]
        if not isinstance(written, dict):
            raise TypeError
    except (json.JSONDecodeError, KeyError, TypeError, RecursionError) as error:
        raise ResultsError(f"{folder / PROVENANCE}: damaged. Run the campaign again; its points are kept.") from error
    tables = {
        name: _read_table(folder, name, columns, written)
        for name, columns in ((COEFFICIENTS, COEFFICIENT_COLUMNS), (DISTRIBUTIONS, DISTRIBUTION_COLUMNS))
    }
    return Results(folder, tables[COEFFICIENTS], tables[DISTRIBUTIONS], provenance)


def _read(folder: Path, name: str) -> str:
    try:
        return (folder / name).read_bytes().decode("utf-8")
    except OSError as error:
        raise ResultsError(
            f"{folder}: {name} cannot be read ({error.strerror}). Give the results folder of a finished run."
        ) from error
    except UnicodeDecodeError as error:
        raise ResultsError(f"{folder / name}: damaged. Run the campaign again; its points are kept.") from error


def _read_table(folder: Path, name: str, columns: dict[str, type], written: dict[str, str]) -> np.ndarray:
    text = _read(folder, name)
    if checksum(text) != written.get(name):
        raise ResultsError(
            f"{folder / name}: not as the run wrote it. Run the campaign again (its points are kept), "
            "and edit a copy instead."
        )
    head, *rows = csv.reader(io.StringIO(text))
    values = list(zip(*rows, strict=True)) or [()] * len(head)
    table = np.empty(
        len(rows),
        dtype=[(column, _dtype(kind, cells)) for (column, kind), cells in zip(columns.items(), values, strict=True)],
    )
    for (column, kind), cells in zip(columns.items(), values, strict=True):
        table[column] = [cell or "nan" for cell in cells] if kind is float else cells
    table.flags.writeable = False
    return table


def _dtype(kind: type, cells: tuple[str, ...]) -> str:
    if kind is str:
        return f"U{max((len(cell) for cell in cells), default=1) or 1}"
    return "f8" if kind is float else "i8"
