"""Gaps, jumps and holes in tables, and processes that are there twice."""

from collections.abc import Iterator
from itertools import combinations

import numpy as np

from ..gas import Gas
from ..laws import Table
from ..process import Process
from .finding import Finding, percent, tables_of

_WORTH = 0.05  # of the peak
_GAP_RATIO, _GAP_EFFECT = 2.0, 0.25
_OFF, _SMOOTH = 2.5, 2.0
_FEW = 2  # zeros in a row of peaks are meant
_LOW_START_EV = 0.1
_PROPORTIONAL, _EQUAL = 1e-4, 1e-3
_LEAST_COMMON = 6


def check_gaps(gas: Gas) -> Iterator[Finding]:
    """Wide intervals where linear interpolation departs from a power law; and a late start of elastic collisions."""
    for process, table in tables_of(gas):
        yield from _gap(process, table)
        if process.kind == "elastic" and table.start_eV > _LOW_START_EV:
            yield Finding(
                "doubt",
                "gap",
                f"the table starts at {table.start_eV:g} eV; below it the first value, {table.cross_section_m2[0]:.3g} "
                "m2, is kept, where slow electrons feel it.",
                "Add values down to 0.01 eV.",
                process.id,
                0.0,
                table.start_eV,
                1,
            )


def _gap(process: Process, table: Table) -> Iterator[Finding]:
    energy, section = table.energy_eV, table.cross_section_m2
    low, high = energy[:-1], energy[1:]
    seen = (np.minimum(section[:-1], section[1:]) > _WORTH * section.max()) & (low > 0.0)
    rows = np.flatnonzero(seen & (high > _GAP_RATIO * np.where(low > 0.0, low, 1.0)))
    if not len(rows):
        return
    middle = np.sqrt(low[rows] * high[rows])
    effect = np.interp(middle, energy, section) / np.sqrt(section[rows] * section[rows + 1]) - 1.0
    worst = int(np.argmax(np.abs(effect)))
    if abs(effect[worst]) < _GAP_EFFECT:
        return
    row = int(rows[worst])
    yield Finding(
        "doubt",
        "gap",
        f"there is no point between rows {row + 1} and {row + 2}; halfway, a straight line lies "
        f"{percent(abs(effect[worst]))} {'above' if effect[worst] > 0.0 else 'below'} a power law through both.",
        "Add points in between.",
        process.id,
        float(energy[row]),
        float(energy[row + 1]),
        row + 1,
    )


def check_jumps(gas: Gas) -> Iterator[Finding]:
    """Single values off a smooth curve, such as a slip of a digit; and zeros within a curve."""
    for process, table in tables_of(gas):
        yield from _outlier(process, table)
        yield from _hole(process, table)


def _outlier(process: Process, table: Table) -> Iterator[Finding]:
    """A value far off the line through its neighbours where these, and the next ones, vary little."""
    energy, section = table.energy_eV, table.cross_section_m2
    rows = np.arange(3, len(energy) - 3)
    if not len(rows):
        return
    around = np.stack([section[rows + shift] for shift in (-3, -2, -1, 1, 2, 3)])
    smooth = (around.min(axis=0) > _WORTH * section.max()) & (around.max(axis=0) < _SMOOTH * around.min(axis=0))
    part = (energy[rows] - energy[rows - 1]) / (energy[rows + 1] - energy[rows - 1])
    expected = section[rows - 1] + part * (section[rows + 1] - section[rows - 1])
    off = section[rows] / np.where(expected > 0.0, expected, 1.0)
    for place in np.flatnonzero(smooth & ((off > _OFF) | (off < 1.0 / _OFF))):
        row = int(rows[place])
        yield Finding(
            "doubt",
            "jump",
            f"{section[row]:.4g} m2 is {off[place]:.2g} times what the rows around suggest, {expected[place]:.3g} m2.",
            "Compare the row with its source; a digit may have slipped.",
            process.id,
            float(energy[row]),
            row=row + 1,
        )


def _hole(process: Process, table: Table) -> Iterator[Finding]:
    section = table.cross_section_m2
    positive = np.flatnonzero(section > 0.0)
    inside = np.arange(positive[0] + 1, positive[-1])
    beside = np.maximum(section[inside - 1], section[inside + 1])
    holes = inside[(section[inside] == 0.0) & (beside > _WORTH * section.max())]
    if len(holes):
        yield Finding(
            "doubt" if len(holes) <= _FEW else "note",
            "jump",
            f"a zero between values that are not, in {len(holes)} row{'s' if len(holes) > 1 else ''}.",
            "Right between separate peaks; else put in the value, or remove the row.",
            process.id,
            float(table.energy_eV[holes[0]]),
            float(table.energy_eV[holes[-1]]),
            int(holes[0]) + 1,
        )


def check_duplicates(gas: Gas) -> Iterator[Finding]:
    """Acting processes that are equal or proportional to each other: perhaps one, counted twice."""
    tables = [(p, t) for p, t in tables_of(gas) if not p.passive and p.kind != "elastic" and p.third_body is None]
    for (one, first), (other, second) in combinations(tables, 2):
        ratio = proportional(first, second)
        if ratio is None:
            continue
        equal = abs(ratio - 1.0) < _EQUAL
        same = one.kind == other.kind and abs(one.threshold_eV - other.threshold_eV) < 0.01 * max(one.threshold_eV, 1.0)
        yield Finding(
            "error" if equal and same else "doubt" if equal or same else "note",
            "duplicate",
            f"equal to {one.id}." if equal else f"{ratio:.4g} times {one.id} at all energies.",
            "Remove one if they are the same process; right for parts of one measured total.",
            other.id,
            other.threshold_eV,
        )


def proportional(first: Table, second: Table) -> float | None:
    """The constant ratio of the second table to the first, or None where there is none."""
    low, high = max(first.start_eV, second.start_eV), min(first.end_eV, second.end_eV)
    energy = np.unique(np.concatenate([first.energy_eV, second.energy_eV]))
    energy = energy[(energy >= low) & (energy <= high)]
    one, two = first.value(energy), second.value(energy)
    seen = (one > 0.0) & (two > 0.0)
    if np.count_nonzero(seen) < _LEAST_COMMON or ((one > 0.0) ^ (two > 0.0)).any():
        return None
    ratio = two[seen] / one[seen]
    middle = float(np.median(ratio))
    return middle if np.abs(ratio / middle - 1.0).max() < _PROPORTIONAL else None
