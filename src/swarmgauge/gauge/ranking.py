"""Sets of one gas ranked by how well they agree with the same measurements."""

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass

from .comparison import Compared
from .statistics import chi_squared_probability

_TOLD_APART = 4.0  # difference of chi-squared: two standard errors, were there one free parameter between the sets


@dataclass(frozen=True)
class Apart:
    """Where two sets differ most among the measured places, in units of the measurement's error.

    value, best : computed by the set and by the best one.
    """

    quantity: str
    E_over_N_Td: float
    value: float
    best: float
    unit: str

    @property
    def ratio(self) -> float:
        """Value of the set over that of the best, less one."""
        return self.value / self.best - 1.0 if self.best else math.nan


@dataclass(frozen=True)
class Ranked:
    """One mixture among those of the same molecules. place : from 1. apart : from the best; None for the best itself.

    chi_squared, count : over the data that were compared for all of these mixtures. probability : of so much or more.
    """

    gas: str
    place: int
    mixture: str
    count: int
    chi_squared: float
    probability: float
    told_apart: bool
    apart: Apart | None

    @property
    def reduced(self) -> float:
        """Chi-squared per datum."""
        return self.chi_squared / self.count


def ranking(compared: Iterable[Compared]) -> list[Ranked]:
    """The mixtures of every gas of which there are several, the best first; only data that all of them can meet."""
    gases: dict[str, dict[str, dict[tuple, Compared]]] = {}
    for pair in compared:
        if pair.state is not None and pair.computed is not None:
            datum = pair.datum
            of_gas = gases.setdefault(pair.state.gas, {})
            key = (datum.place, datum.quantity, datum.E_over_N_Td)
            of_gas.setdefault(pair.state.mixture, {})[key] = pair
    return [ranked for gas, mixtures in gases.items() if len(mixtures) > 1 for ranked in _ranked(gas, mixtures)]


def _ranked(gas: str, mixtures: dict[str, dict[tuple, Compared]]) -> list[Ranked]:
    common = [key for key in next(iter(mixtures.values())) if all(key in pairs for pairs in mixtures.values())]
    if not common:
        return []
    chosen = {mixture: [pairs[key] for key in common] for mixture, pairs in mixtures.items()}
    sums = {mixture: math.fsum(pair.pull**2 for pair in pairs) for mixture, pairs in chosen.items()}
    order = sorted(sums, key=lambda mixture: sums[mixture])
    best = order[0]
    return [
        Ranked(
            gas=gas,
            place=place,
            mixture=mixture,
            count=len(common),
            chi_squared=sums[mixture],
            probability=chi_squared_probability(sums[mixture], len(common)),
            told_apart=sums[mixture] - sums[best] > _TOLD_APART,
            apart=None if mixture == best else _apart(chosen[mixture], chosen[best]),
        )
        for place, mixture in enumerate(order, start=1)
    ]


def _apart(pairs: Sequence[Compared], best: Sequence[Compared]) -> Apart:
    def distance(two: tuple[Compared, Compared]) -> float:
        return abs(two[0].value.value - two[1].value.value) / two[0].datum.standard_error

    one, other = max(zip(pairs, best, strict=True), key=distance)
    datum = one.datum
    return Apart(datum.quantity, datum.E_over_N_Td, one.value.value, other.value.value, datum.unit)
