"""A rectangle of numbers out of a text file. Words in it mean nothing here."""

import math
import re
from dataclasses import dataclass
from itertools import groupby

import numpy as np

from ..errors import ColumnError, printable

_FORTRAN = re.compile(r"(?<=[0-9.])[dD](?=[+-]?[0-9])")  # 1.5D-20
_COMMA_IN_NUMBER = re.compile(r"[0-9],[0-9]")
_RUNS_NAMED = 4


@dataclass(frozen=True, eq=False)
class Rectangle:
    """Rows of numbers, all of one length.

    values : (rows, columns). lines : (rows,), where each row stands in the file, counted from 1.
    """

    values: np.ndarray
    lines: np.ndarray

    @property
    def columns(self) -> int:
        """How many numbers a row has."""
        return self.values.shape[1]


def read_rectangle(text: str, lines: tuple[int, int] | None = None, decimal_comma: bool = False) -> Rectangle:
    """The rectangle in a text: all of it, or the lines from the first to the last of `lines`, counted from 1.

    Numbers stand apart by spaces, tabs, semicolons or commas; with decimal_comma a comma belongs to a number. Empty
    lines within `lines` are skipped. Raises ColumnError, without a file's name: where there is none, more than one, or
    other text beside it, so that `lines` must tell; and where a comma may be either.
    """
    rows = [(number, line) for number, line in enumerate(text.splitlines(), start=1)]
    if lines is not None:
        rows = [(number, line) for number, line in rows if lines[0] <= number <= lines[1] and line.strip()]
    if not decimal_comma:
        _refuse_ambiguous_commas(rows)
    parsed = [(number, line, _numbers(line, decimal_comma)) for number, line in rows]
    runs = [(key, list(group)) for key, group in groupby(parsed, key=lambda row: len(row[2]) if row[2] else 0)]
    tables = [group for key, group in runs if key]
    others = [row for key, group in runs if not key for row in group if row[1].strip()]
    if len(tables) != 1 or others:
        raise ColumnError(_several(tables, others, lines))
    (table,) = tables
    return Rectangle(np.array([row[2] for row in table]), np.array([row[0] for row in table]))


def _numbers(line: str, decimal_comma: bool) -> list[float]:
    """The numbers of a line, or nothing where it holds anything else."""
    words = line.replace(",", ".") if decimal_comma else line
    parts = re.split(r"\s*[,;]\s*|\s+", words.strip())
    try:
        values = [float(_FORTRAN.sub("e", part)) for part in parts]
    except ValueError:
        return []
    return values if all(map(math.isfinite, values)) else []


def _refuse_ambiguous_commas(rows: list[tuple[int, str]]) -> None:
    for number, line in rows:
        apart = [part for part in re.split(r"[;\s]+", line.strip()) if part]
        if len(apart) > 1 and all(re.fullmatch(r"[0-9.,eEdD+-]+", part) for part in apart):
            inside = [part for part in apart if _COMMA_IN_NUMBER.search(part)]
            if inside:
                raise ColumnError(
                    f"line {number}: is the comma in {printable(inside[0])} a decimal sign? If so, give "
                    "--decimal-comma; else separate all numbers by commas alone."
                )


def _several(tables: list[list], others: list, lines: tuple[int, int] | None) -> str:
    """What there is instead of one rectangle, and how to choose."""
    found = [_described(table) for table in tables[:_RUNS_NAMED]]
    more = len(tables) - _RUNS_NAMED
    found += [f"and {more} more such blocks"] if more > 0 else []
    if others:
        number, line, _ = others[0]
        found.insert(0, f'line {number} is not a row of numbers ("{printable(line.strip())}")')
    if not tables:
        where = f"lines {lines[0]} to {lines[1]} hold" if lines else "it holds"
        return f"{'; '.join(found) or where + ' no numbers'}. Give a file with columns of numbers."
    table = max(tables, key=len)
    return f"{'; '.join(found)}. Say which lines are the table, as --lines {table[0][0]}-{table[-1][0]}."


def _described(table: list) -> str:
    first, last, columns = table[0][0], table[-1][0], len(table[0][2])
    if first == last:
        return f"line {first} alone has {columns} numbers"
    return f"lines {first} to {last} hold {len(table)} rows of {columns} numbers"
