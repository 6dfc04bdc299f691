"""Sweeps and lists of a run file, laid out as points."""

import math
from collections.abc import Sequence

from .runfile_model import Sweep

MOST_POINTS = 100_000
_CLOSEST_TO_END = 0.99  # a step that comes nearer to the end than this would only double it


def fields_of(given: Sequence[float] | Sweep) -> list[float]:
    """Reduced fields in Td: a list as it stands (each value once), a sweep laid out.

    Raises ValueError for a sweep that is empty or too long.
    """
    fields = expand(given) if isinstance(given, Sweep) else given
    return list(dict.fromkeys(fields))


def expand(sweep: Sweep) -> list[float]:
    """Values from x 10^(k / per_decade), k = 0, 1, ..., while more than 1 % below the end; then the end.

    Steps pass through text of six digits: a power differs in its last bit between computers, such a text does not.
    Raises ValueError for a sweep that is empty or too long.
    """
    if sweep.from_ > sweep.to:
        raise ValueError(f"from = {sweep.from_:g} is above to = {sweep.to:g}: the sweep is empty. Swap them.")
    steps = math.log10(sweep.to / sweep.from_) * sweep.per_decade
    if steps > MOST_POINTS:
        raise ValueError(f"the sweep has {steps:.3g} steps; at most {MOST_POINTS} are possible. Lower per_decade.")
    values = []
    for step in range(math.ceil(steps) + 1):
        value = float(f"{sweep.from_ * 10.0 ** (step / sweep.per_decade):.6g}")
        if value >= _CLOSEST_TO_END * sweep.to:
            break
        values.append(value)
    return [*values, sweep.to]
