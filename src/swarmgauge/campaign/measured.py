"""Measured swarm data: one tidy CSV table a file, read with its units and checked whole."""

import csv
import io
import math
from collections.abc import Callable, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from swarmgauge.gas import InputError, Mixture
from swarmgauge.gas.errors import printable, suggestion
from swarmgauge.gas.faults import joined
from swarmgauge.gas.setfile import read_text

from .composition import Composition, CompositionError, parts_of
from .measured_quantities import METHODS, can_be_negative, conflict_with_method, question_about, unit_of_measured
from .results import csv_text
from .shipped import shipped_data
from .units import UnitError, factor_to

COLUMNS = (
    "quantity",
    "E_over_N",
    "E_over_N_unit",
    "value",
    "unit",
    "uncertainty",
    "uncertainty_is",
    "relative",
    "gas",
    "temperature_K",
    "pressure_Pa",
    "method",
    "source",
)
_MAY_BE_EMPTY = ("temperature_K", "pressure_Pa")
# Standard errors to a stated uncertainty; a limit is the half width of a range within which all values are alike.
_STANDARD_ERRORS = {"one_sigma": 1.0, "two_sigma": 2.0, "limit": math.sqrt(3.0)}
_FASTEST = 2.99792458e8  # m/s
_HIGHEST_TD = 1e6
_DIGITS = 6  # of reduced fields: a conversion may differ in its last bit, such a text does not


class MeasuredError(InputError):
    """A file of measured data that cannot be used."""


@dataclass(frozen=True)
class Datum:
    """One measured value in the units of the computed ones.

    E_over_N_Td, value, standard_error (from whatever kind of uncertainty is stated), unit : converted. gas : as
    written. temperature_K, pressure_Pa : None where not stated. method : TOF, PT, SST or other. place : file and line.
    """

    quantity: str
    E_over_N_Td: float
    value: float
    standard_error: float
    unit: str
    gas: Composition
    temperature_K: float | None
    pressure_Pa: float | None
    method: str
    source: str
    place: str


def read_measured(path: str | Path) -> list[Datum]:
    """The data of one file.

    Raises MeasuredError with file, line, column, what was found and what to do, for several lines at once.
    """
    path = Path(path)
    try:
        text = read_text(path)
    except InputError as error:
        raise MeasuredError(str(error)) from error
    data: list[Datum] = []
    faults: list[str] = []
    seen: dict[Any, str] = {}
    for number, cells in _rows(text, path):
        try:
            datum = _datum(cells, f"{path.name}, line {number}")
            same = (replace(datum, place="", value=0.0, standard_error=0.0), datum.value)
            if same in seen:
                raise MeasuredError(f"says the same as {seen[same]}. Remove one of them.")
            seen[same] = f"line {number}"
            data.append(datum)
        except InputError as error:
            faults.append(f"line {number}, {error}")
    if faults:
        raise MeasuredError(joined(faults, f"{path}, "))
    if not data:
        raise MeasuredError(f"{path}: holds no data. Give at least one row under the head.")
    return data


def measured_data(files: Sequence[str] | None, folder: Path) -> list[Datum]:
    """The data of several files: paths from a folder, or names of shipped files; all shipped ones where None.

    Raises MeasuredError.
    """
    shipped = shipped_data()
    data = []
    for name in shipped if files is None else dict.fromkeys(files):
        path = folder / name
        data += read_measured(shipped[name] if name in shipped and not path.is_file() else path)
    return data


def measured_csv(data: Iterable[Datum]) -> str:
    """The text of a file with these data, converted; where each comes from is kept in its source."""
    return csv_text(COLUMNS, (_cells(datum) for datum in data))


def fields_of_data(data: Iterable[Datum], mixture: Mixture) -> list[float]:
    """The reduced fields, Td, at which something was measured in this gas, rising, each once."""
    parts = parts_of(mixture)
    return sorted({datum.E_over_N_Td for datum in data if datum.gas.is_that_of(parts)})


def _cells(datum: Datum) -> list[Any]:
    field = [datum.quantity, datum.E_over_N_Td, "Td"]
    uncertainty = [datum.value, datum.unit, datum.standard_error, "one_sigma", "no"]
    return [*field, *uncertainty, str(datum.gas), datum.temperature_K, datum.pressure_Pa, datum.method, datum.source]


def _rows(text: str, path: Path) -> Iterator[tuple[int, dict[str, str]]]:
    """Line number and cells by column of each row; lines that begin with # are remarks."""
    reader = csv.reader(io.StringIO(text, newline=""), strict=True, skipinitialspace=True)
    head: list[str] | None = None
    try:
        for row in reader:
            if not any(cell.strip() for cell in row) or row[0].startswith("#"):
                continue
            if head is None:
                head = _checked_head([cell.strip() for cell in row], path)
                continue
            if len(row) != len(head):
                raise MeasuredError(
                    f"{path}, line {reader.line_num}: has {len(row)} cells under {len(head)} columns. Put text that "
                    'holds a comma in "quotes".'
                )
            yield reader.line_num, dict(zip(head, (cell.strip() for cell in row), strict=True))
    except csv.Error as error:
        raise MeasuredError(
            f"{path}, line {reader.line_num}: is not CSV ({error}). Correct the quotes there."
        ) from error
    if head is None:
        raise MeasuredError(f"{path}: is empty. Its first line names the columns: {', '.join(COLUMNS)}.")


def _checked_head(head: list[str], path: Path) -> list[str]:
    if len(head) == 1:
        raise MeasuredError(f"{path}: has one column only. Separate columns by commas: {', '.join(COLUMNS)}.")
    for name in head:
        if name not in COLUMNS:
            raise MeasuredError(
                f'{path}, column "{printable(name)}": unknown.{suggestion(name, COLUMNS)} '
                f"Columns: {', '.join(COLUMNS)}."
            )
    missing = [name for name in COLUMNS if name not in head and name not in _MAY_BE_EMPTY]
    if missing:
        raise MeasuredError(f"{path}: column {', '.join(missing)} is missing. Add it; every row needs it.")
    if len(set(head)) < len(head):
        raise MeasuredError(f"{path}: a column stands there twice. Remove one.")
    return head


def _datum(cells: dict[str, str], place: str) -> Datum:
    """One row; raises MeasuredError with the column."""
    for name in COLUMNS:
        if not cells.get(name) and name not in _MAY_BE_EMPTY:
            raise MeasuredError(f"column {name}: is empty. {_TO_GIVE.get(name, 'Give it.')}")
    quantity = cells["quantity"]
    unit = unit_of_measured(quantity)
    if unit is None:
        raise MeasuredError(f'column quantity: "{printable(quantity)}": {question_about(quantity)}')
    method = _choice(cells, "method", METHODS)
    if conflict := conflict_with_method(quantity, method):
        raise MeasuredError(f"column method: {method}: {quantity} {conflict}")
    temperature, pressure = (_optional(cells, name) for name in _MAY_BE_EMPTY)
    to_field = _at("E_over_N_unit", factor_to, cells["E_over_N_unit"], "Td", temperature, pressure)
    to_value = _at("unit", factor_to, cells["unit"], unit, temperature, pressure)
    value = _checked_value(quantity, to_value * _number(cells, "value"), unit)
    return Datum(
        quantity=quantity,
        E_over_N_Td=_checked_field(to_field * _not_negative(cells, "E_over_N")),
        value=value,
        standard_error=_standard_error(cells, value, to_value),
        unit=unit,
        gas=_at("gas", Composition.parse, cells["gas"]),
        temperature_K=temperature,
        pressure_Pa=pressure,
        method=method,
        source=cells["source"],
        place=place,
    )


_TO_GIVE = {
    "uncertainty": "Give it; where the source states none, your own estimate, and say so under source.",
    "unit": "Give the unit; a pure number has the unit 1.",
    "E_over_N_unit": "Give the unit of the field, such as Td or V/(cm Torr).",
    "method": f"Give one of {', '.join(METHODS)}.",
    "source": "Give author, year and place of publication, or what else it rests on.",
    "uncertainty_is": f"Give one of {', '.join(_STANDARD_ERRORS)}.",
    "relative": "Give yes where the uncertainty is a part of the value, no where it has the unit of the value.",
    "gas": "Give a formula such as N2, parts such as 0.8 N2 + 0.2 O2, or air.",
}


def _at(column: str, function: Callable[..., Any], *arguments: Any) -> Any:
    """A call whose refusal gets the name of the column."""
    try:
        return function(*arguments)
    except (UnitError, CompositionError) as error:
        raise MeasuredError(f"column {column}: {error}") from error


def _choice(cells: dict[str, str], column: str, choices: Iterable[str]) -> str:
    known = list(choices)
    if cells[column] not in known:
        near = suggestion(cells[column], known)
        raise MeasuredError(f'column {column}: "{printable(cells[column])}" is none of {", ".join(known)}.{near}')
    return cells[column]


def _number(cells: dict[str, str], column: str) -> float:
    try:
        number = float(cells[column])
    except ValueError:
        number = math.nan
    if not math.isfinite(number):
        raise MeasuredError(f'column {column}: "{printable(cells[column])}" is not a number. Write it like 1.5e4.')
    return number


def _not_negative(cells: dict[str, str], column: str) -> float:
    number = _number(cells, column)
    if number < 0.0:
        raise MeasuredError(f"column {column}: {number:g} is negative. Give a number of 0 or more.")
    return number


def _optional(cells: dict[str, str], column: str) -> float | None:
    if not cells.get(column):
        return None
    number = _number(cells, column)
    if not number > 0.0:
        raise MeasuredError(f"column {column}: {number:g} is impossible in an experiment. Give a number above 0.")
    return number


def _checked_field(field: float) -> float:
    if not field <= _HIGHEST_TD:
        raise MeasuredError(f"column E_over_N: {field:g} Td is no field of a swarm. Check number and unit.")
    return float(f"{field:.{_DIGITS}g}")


def _checked_value(quantity: str, value: float, unit: str) -> float:
    if not math.isfinite(value):
        raise MeasuredError("column value: becomes too large a number. Check value and unit.")
    if value < 0.0 and not can_be_negative(quantity):
        raise MeasuredError(f"column value: {value:g} {unit} is negative. {quantity} has one sign; give it without.")
    if unit == "m/s" and value >= _FASTEST:
        raise MeasuredError(f"column value: {value:g} m/s is faster than light. Check value and unit.")
    return value


def _standard_error(cells: dict[str, str], value: float, to_value: float) -> float:
    relative = _choice(cells, "relative", ("yes", "no")) == "yes"
    stated = _not_negative(cells, "uncertainty")
    if relative and stated > 1.0:
        raise MeasuredError(
            f"column uncertainty: {stated:g} is {100 * stated:g} %. If per cent was meant, divide by 100."
        )
    error = stated * (abs(value) if relative else to_value)
    if not 0.0 < error < math.inf:
        raise MeasuredError("column uncertainty: no measurement is exact. Give a number above 0.")
    return error / _STANDARD_ERRORS[_choice(cells, "uncertainty_is", _STANDARD_ERRORS)]
