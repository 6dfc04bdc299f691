"""Measured data beside computed coefficients: each datum with the value of the same definition, state and field."""

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from swarmgauge.campaign.measured import Datum
from swarmgauge.campaign.measured_quantities import PT_RATIO
from swarmgauge.campaign.results import Results, ResultsError

from .interpolation import OnCurve, on_curve

_SAME_TEMPERATURE_K = 10.0
_SAME_PRESSURE = 0.2  # relative; where third bodies matter
_NEEDS_TARGET = ("townsend_", "sst_")
_WITH_SOURCES = ("_bulk", "_frequency_over_N", "townsend_", "sst_")


@dataclass(frozen=True)
class State:
    """One gas in one state, as the results name it. parts : formula to fraction."""

    mixture: str
    temperature_K: float
    pressure_Pa: float
    parts: tuple[tuple[str, float], ...]
    three_body: bool

    @property
    def gas(self) -> str:
        """The molecules, whatever sets describe them."""
        return self.parts[0][0] if len(self.parts) == 1 else " + ".join(f"{x:.6g} {name}" for name, x in self.parts)

    def __str__(self) -> str:
        pressure = "" if math.isnan(self.pressure_Pa) else f", {self.pressure_Pa:g} Pa"
        return f"{self.mixture} at {self.temperature_K:g} K{pressure}"


@dataclass(frozen=True)
class Compared:
    """One datum beside its computed value; computed, or why not, is None."""

    datum: Datum
    state: State | None
    computed: OnCurve | None
    why_not: str | None

    @property
    def value(self) -> OnCurve:
        """The computed value of a datum that is compared."""
        assert self.computed is not None
        return self.computed

    @property
    def computed_error(self) -> float:
        """Standard error of the computed side: statistics and interpolation."""
        return math.hypot(self.value.standard_error, self.value.interpolation_error)

    @property
    def pull(self) -> float:
        """Computed less measured value, over the error of both."""
        error = math.hypot(self.datum.standard_error, self.computed_error)
        return (self.value.value - self.datum.value) / error

    @property
    def deviation(self) -> float:
        """Computed over measured value, less one; NaN where the measured value is not above zero."""
        return self.value.value / self.datum.value - 1.0 if self.datum.value > 0.0 else math.nan


def compare(results: Results, data: Iterable[Datum]) -> list[Compared]:
    """Each datum beside every mixture of its gas, in the order of the results; those of no mixture last."""
    states = _states(results)
    curves: dict[tuple[State, str], tuple[np.ndarray, np.ndarray, np.ndarray]] = {}
    compared, foreign = [], []
    for datum in data:
        found = False
        for mixture in dict.fromkeys(state.mixture for state in states):
            of_mixture = [state for state in states if state.mixture == mixture]
            if datum.gas.is_that_of(dict(of_mixture[0].parts)):
                found = True
                compared.append(_compared(results, curves, datum, of_mixture))
        if not found:
            foreign.append(Compared(datum, None, None, f"no mixture of the campaign is {datum.gas}"))
    order = {state: place for place, state in enumerate(states)}
    return sorted(compared, key=lambda pair: order[pair.state]) + foreign  # type: ignore[index]


def _states(results: Results) -> list[State]:
    table = results.coefficients
    described = results.provenance.get("mixtures")
    if described is None:
        raise ResultsError(f"{results.path}: was written before data could be compared. Run it again; points are kept.")
    rows = zip(*(table[name].tolist() for name in ("mixture", "temperature_K", "pressure_Pa")), strict=True)
    states: dict[str, State] = {}
    for mixture, temperature, pressure in rows:
        if not described[mixture]["as_gas"]:  # levels away from the temperature: nothing was measured in such a gas
            continue
        parts = tuple(sorted(described[mixture]["parts"].items()))
        state = State(mixture, temperature, pressure, parts, described[mixture]["three_body"])
        states.setdefault(repr((mixture, temperature, pressure)), state)
    return list(states.values())


def _compared(results: Results, curves: dict[Any, Any], datum: Datum, states: Sequence[State]) -> Compared:
    state, why_not = _state_of(datum, states)
    if why_not:
        return Compared(datum, state, None, why_not)
    key = (repr(state), datum.quantity)
    if key not in curves:
        curves[key] = computed_curve(results, state, datum.quantity)
    if curves[key] is None:
        return Compared(datum, state, None, _how_to_get(datum.quantity))
    fields, values, errors = curves[key]
    found = on_curve(fields, values, errors, datum.E_over_N_Td)
    return Compared(datum, state, None, found) if isinstance(found, str) else Compared(datum, state, found, None)


def _state_of(datum: Datum, states: Sequence[State]) -> tuple[State, str | None]:
    """The state nearest to that of a measurement, and why it is not near enough."""
    temperatures = {state.temperature_K for state in states}
    if datum.temperature_K is None:
        if len(temperatures) > 1:
            return states[0], "the file states no temperature and the campaign has several"
        near = list(states)
    else:
        asked = datum.temperature_K
        temperature = min(temperatures, key=lambda kelvin: abs(kelvin - asked))
        near = [state for state in states if state.temperature_K == temperature]
        if abs(temperature - asked) > _SAME_TEMPERATURE_K:
            return near[0], f"it was measured at {asked:g} K and the nearest that was computed is {temperature:g} K"
    if not (near[0].three_body and any(word in datum.quantity for word in _WITH_SOURCES)):
        return near[0], None
    if datum.pressure_Pa is None:
        return near[0], "the file states no pressure, on which three-body attachment depends"
    asked = datum.pressure_Pa
    state = min(near, key=lambda one: abs(one.pressure_Pa - asked))
    if abs(state.pressure_Pa - asked) > _SAME_PRESSURE * asked:
        return state, f"three bodies act; it was measured at {asked:g} Pa and computed at {state.pressure_Pa:g} Pa"
    return state, None


def _how_to_get(quantity: str) -> str:
    if quantity.startswith(_NEEDS_TARGET):
        return "the results do not hold it. Give a target for it under [accuracy] and run again"
    return "the results do not hold it"


def computed_curve(results: Results, state: State, quantity: str) -> tuple[np.ndarray, np.ndarray, np.ndarray] | None:
    """Fields, values and standard errors of what was seen in one state, or None where the quantity is not there."""
    if quantity == PT_RATIO:
        return _ratio(
            computed_curve(results, state, "net_frequency_over_N"),
            computed_curve(results, state, "drift_velocity_bulk"),
        )
    if quantity not in results.coefficients["quantity"]:
        return None
    rows = results.select(quantity, mixture=state.mixture, temperature_K=state.temperature_K)
    pressures = rows["pressure_Pa"]
    rows = rows[np.isnan(pressures) if math.isnan(state.pressure_Pa) else pressures == state.pressure_Pa]
    rows = rows[np.isnan(rows["upper_bound"]) & np.isfinite(rows["value"]) & np.isfinite(rows["standard_error"])]
    return rows["E_over_N_Td"], rows["value"], rows["standard_error"]


def _ratio(above: Any, below: Any) -> tuple[np.ndarray, np.ndarray, np.ndarray] | None:
    """One curve over another at their common fields; the errors count as independent."""
    if above is None or below is None:
        return None
    fields, first, second = np.intersect1d(above[0], below[0], return_indices=True)
    a, b = above[1][first], below[1][second]
    return fields, a / b, np.hypot(above[2][first], a / b * below[2][second]) / np.abs(b)
