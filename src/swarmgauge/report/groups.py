"""The curves of a figure: one per mixture, temperature and pressure."""

import math
from dataclasses import dataclass

import numpy as np

from swarmgauge.campaign.results import Results

_CONDITIONS = ("mixture", "temperature_K", "pressure_Pa")


@dataclass(frozen=True, eq=False)
class Group:
    """One gas in one state.

    state : in words. label : what sets it apart from the other groups. rows : its part of `Results.coefficients`.
    """

    state: str
    label: str
    rows: np.ndarray

    def quantity(self, name: str) -> np.ndarray:
        """Rows of one quantity by rising E/N."""
        rows = self.rows[self.rows["quantity"] == name]
        return rows[np.argsort(rows["E_over_N_Td"], kind="stable")]


def groups_of(results: Results) -> list[Group]:
    """The groups of a results folder, in the order of its table."""
    table = results.coefficients
    states = list(zip(*(table[name].tolist() for name in _CONDITIONS), strict=True))
    names = np.array([_describe(state) for state in states])
    varying = [len({repr(state[place]) for state in states}) > 1 for place in range(len(_CONDITIONS))]
    first = {name: states[place] for place, name in reversed(list(enumerate(names.tolist())))}
    ordered = dict.fromkeys(names.tolist())
    return [Group(name, _label(first[name], varying), table[names == name]) for name in ordered]


def _describe(state: tuple[str, float, float]) -> str:
    mixture, temperature, pressure = state
    return f"{mixture}, {temperature:g} K" + ("" if math.isnan(pressure) else f", {pressure:g} Pa")


def _label(state: tuple[str, float, float], varying: list[bool]) -> str:
    mixture, temperature, pressure = state
    parts = [mixture] if varying[0] or not any(varying) else []
    parts += [f"{temperature:g} K"] if varying[1] else []
    parts += [f"{pressure:g} Pa"] if varying[2] else []
    return ", ".join(parts)
