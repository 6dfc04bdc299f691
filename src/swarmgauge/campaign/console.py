"""What a run prints: 80 columns of plain text, its table and what to do about each missed target."""

import textwrap
from collections.abc import Iterator, Mapping, Sequence
from itertools import groupby, pairwise

from swarmgauge.gas import Mixture
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.point import Point

from .number import compact, format_bound, format_estimate
from .trust import outside

WIDTH = 80
MOST_ROWS = 20
MOST_BLOCKS = 10
_HEAD = (
    "    E/N     energy     W flux     W bulk      D_T N      D_L N   nu_net/N   err/",
    "     Td         eV        m/s        m/s    1/(m s)    1/(m s)      m^3/s target",
)
_EDGES = (7, 18, 29, 40, 51, 62, 73, 80)  # where the columns of the head end
_WIDEST = {
    "mean_energy": 9,
    "drift_velocity_flux": 10,
    "drift_velocity_bulk": 10,
    "diffusion_T_times_N_flux": 10,
    "diffusion_L_times_N_flux": 10,
    "net_frequency_over_N": 12,
}


def table(points: Sequence[Point]) -> Iterator[str]:
    """Lines of the table that a run prints: one block per mixture, temperature and pressure."""
    yield from _blocks([(point.conditions.mixture, _cells(point)) for point in points], _HEAD, "coefficients.csv")


def preview_table(points: Sequence[tuple[Mixture, Field, Mapping[str, float]]]) -> Iterator[str]:
    """The same of two-term values, which have no errors and are not judged."""
    if points:
        yield "two-term preview: no Monte Carlo, no statistical errors"
    rows = [(mixture, _preview_cells(mixture, field, values)) for mixture, field, values in points]
    yield from _blocks(rows, [line[: _EDGES[-2]] for line in _HEAD], "preview.csv")


def _blocks(rows: Sequence[tuple[Mixture, list[str]]], head: Sequence[str], file: str) -> Iterator[str]:
    """Blocks of one mixture each, of rows of cells; what has no room stands in `file`."""
    blocks = [list(block) for _, block in groupby(rows, key=lambda row: id(row[0]))]
    for block in blocks[:MOST_BLOCKS]:
        yield from wrapped(f"{describe(block[0][0])}:")
        yield from head
        yield from _lines([cells for _, cells in block[:MOST_ROWS]])
        if len(block) > MOST_ROWS:
            yield f"    and {len(block) - MOST_ROWS} more fields in {file}"
    if len(blocks) > MOST_BLOCKS:
        yield f"and {len(blocks) - MOST_BLOCKS} more mixtures in {file}"
    if blocks:
        yield f"D_T N and D_L N are flux values; bulk values stand in {file}."


def describe(mixture: Mixture) -> str:
    """A mixture with its temperature and pressure."""
    pressure = "" if mixture.pressure_Pa is None else f", {compact(f'{mixture.pressure_Pa:.6g}')} Pa"
    return f"{mixture.describe()} at {mixture.temperature_K:g} K{pressure}"


def wrapped(text: str, indent: str = "    ") -> list[str]:
    """Lines of at most 80 columns; long words such as paths stay whole, and so do a number and its per cent sign."""
    whole = text.replace(" %", "\N{NO-BREAK SPACE}%")
    lines = textwrap.wrap(whole, WIDTH, subsequent_indent=indent, break_long_words=False, break_on_hyphens=False)
    return [line.replace("\N{NO-BREAK SPACE}", " ") for line in lines]


def _lines(cells: Sequence[list[str]]) -> Iterator[str]:
    """Lines under the head. A column moves aside as far as its neighbours need room."""
    widths = [max(map(len, column)) for column in zip(*cells, strict=True)]
    edges = list(_EDGES[: len(widths)])
    for right, left in pairwise(reversed(range(len(edges)))):
        edges[left] = min(edges[left], edges[right] - widths[right] - 1)
    edges = [max(edge, sum(widths[: place + 1]) + place) for place, edge in enumerate(edges)]
    for row in cells:
        line = ""
        for cell, edge in zip(row, edges, strict=True):
            line += cell.rjust(edge - len(line))
        yield line


def _cells(point: Point) -> list[str]:
    return [
        _marked(point.conditions.mixture, point.conditions.field),
        *(_cell(point, name) for name in _WIDEST),
        _judgement(point),
    ]


def _preview_cells(mixture: Mixture, field: Field, values: Mapping[str, float]) -> list[str]:
    cells = [compact(f"{values[name]:.4g}") if name in values else "-" for name in _WIDEST]
    return [_marked(mixture, field), *cells]


def _marked(mixture: Mixture, field: Field) -> str:
    """The reduced field, with ~ outside the range that a set vouches for."""
    return ("~" if outside(mixture, field) else "") + field_text(field)


def field_text(field: Field) -> str:
    """The reduced field in at most six characters."""
    shown = (compact(f"{field.E_over_N_Td:.{digits}g}") for digits in (5, 4, 3, 2, 1))
    return next(text for text in shown if len(text) <= 6)


def _cell(point: Point, name: str) -> str:
    estimate = point.estimates.get(name)
    if estimate is None:
        return "-"
    if estimate.upper_bound == estimate.upper_bound:  # not NaN: never seen
        return format_bound(estimate.upper_bound)
    return format_estimate(estimate.value, estimate.standard_error, _WIDEST[name])


def _judgement(point: Point) -> str:
    """Worst error over its target, with ! where it is missed; a dash where nothing is judged."""
    missed = "!" if missed_target(point) else ""
    name, excess = point.worst
    if not name:
        return f"-{missed}"
    if not excess < 1000:
        return f">999{missed}"
    return f"{excess:.2f}{missed}" if excess < 10 else f"{excess:.0f}{missed}"


def missed_target(point: Point) -> bool:
    """Whether a target of a point was missed, or the point has no steady state to judge."""
    return point.status != "done"
