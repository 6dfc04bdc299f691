"""A computed curve between its points, with what that adds to the error."""

import math
from dataclasses import dataclass

import numpy as np

_SAME_FIELD = 1e-5  # relative; fields pass through six digits
_MOST_NODES = 4


@dataclass(frozen=True)
class OnCurve:
    """value, standard_error : of the computed curve. interpolation_error : of reading it between its points."""

    value: float
    standard_error: float
    interpolation_error: float


def on_curve(fields: np.ndarray, values: np.ndarray, errors: np.ndarray, at: float) -> OnCurve | str:
    """The curve at a field, or in words why it cannot be read there.

    fields : (n,) Td, rising; values, errors : (n,), the latter standard errors. Between points: a polynomial through
    the four nearest, in ln value against ln field (in value where signs differ). Its error is taken as the largest
    change when one of the outer points is left out, which is the error of the next lower degree.
    """
    if len(fields) == 0:
        return "no point of the campaign has a value of it"
    nearest = int(np.argmin(np.abs(fields - at)))
    if abs(fields[nearest] - at) <= _SAME_FIELD * at:
        return OnCurve(float(values[nearest]), float(errors[nearest]), 0.0)
    if not fields[0] < at < fields[-1]:
        return f"the campaign has values of it from {fields[0]:g} to {fields[-1]:g} Td only"
    used = _nodes(fields, at)
    if at < fields[used[0]]:
        return f"it lies between no field and {fields[used[0]]:g} Td, where logarithms do not reach"
    if len(used) < 3:
        return "fewer than three computed fields are near, too few to read between. Compute more"
    return _between(np.log(fields[used]), values[used], errors[used], math.log(at))


def _nodes(fields: np.ndarray, at: float) -> np.ndarray:
    """Indices of the nearest points, on either side alike where possible; a field of 0 has no logarithm."""
    first = 1 if fields[0] == 0.0 else 0
    right = int(np.searchsorted(fields, at))
    start = min(max(right - _MOST_NODES // 2, first), max(len(fields) - _MOST_NODES, first))
    return np.arange(start, min(start + _MOST_NODES, len(fields)))


def _between(x: np.ndarray, values: np.ndarray, errors: np.ndarray, at: float) -> OnCurve:
    logarithmic = bool((values > 0.0).all())
    y = np.log(values) if logarithmic else values
    spread = errors / values if logarithmic else errors
    weights = _lagrange(x, at)
    centre = float(weights @ y)
    without = [float(_lagrange(x[part], at) @ y[part]) for part in (slice(1, None), slice(None, -1))]
    off = max(abs(other - centre) for other in without)
    error = float(np.sqrt((weights**2) @ (spread**2)))
    if not logarithmic:
        return OnCurve(centre, error, off)
    value = math.exp(centre)
    return OnCurve(value, value * error, value * math.expm1(off))


def _lagrange(x: np.ndarray, at: float) -> np.ndarray:
    """Weights of the polynomial through all points (J.-L. Lagrange)."""
    return np.array([np.prod((at - np.delete(x, k)) / (x[k] - np.delete(x, k))) for k in range(len(x))])
