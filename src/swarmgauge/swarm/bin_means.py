"""Mean values of powers of the speed from a distribution that is known as counts in speed bins.

Even filling of a bin would be wrong to second order in its width, which shows where the swarm has only a few bins:
0.2 % of the mean speed at 1.7 meV. The slope of the density, from the neighbouring bins, is taken into account as well:
what is left is of fourth order.
"""

from collections.abc import Callable

import numpy as np

from swarmgauge.gas.constants import GAUSS_LEGENDRE
from swarmgauge.kernel.lookup import speed_edges


def bin_weights(edges: np.ndarray, volume_power: int, power: int) -> np.ndarray:
    """Factors whose sum with the counts is the integral of w^power; shape (bins,).

    edges : (bins + 1,), speeds, rising. The counts are integrals over bins of a density that is smooth on top of
    w^volume_power dw: 2 for f0, 3 for the velocity along the field, f1.
    """
    volume, first, value, slope = _integrals(edges, volume_power, lambda speed, part: _product(speed, power))
    return _with_slopes(volume, first, value, slope)


def curve_weights(low: np.ndarray, high: np.ndarray, joined: int) -> np.ndarray:
    """Factors whose sum with the counts of f0 is the integral of a frequency, on bins of `joined` speed cells each.

    low, high : (SPEED_CELLS,), the frequency at the ends of every speed cell, linear between.
    """
    cells = _integrals(speed_edges(), 2, lambda speed, part: low + part * (high - low))
    columns = np.stack(cells, axis=1).reshape(-1, joined, len(cells))
    return _with_slopes(*np.cumsum(columns, axis=1)[:, -1].T)


def _integrals(edges: np.ndarray, volume_power: int, function: Callable) -> tuple[np.ndarray, ...]:
    """Integrals of w^volume_power times 1, w, g and w g over every bin; g = function(w, position in the bin)."""
    middle, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    volume, first, value, slope = (np.zeros(len(middle)) for _ in range(4))
    for node, weight in GAUSS_LEGENDRE:  # one after the other, as numpy's own order of sums depends on the processor
        speed = middle + half * node
        filling = half * weight * _product(speed, volume_power)
        sample = function(speed, 0.5 + 0.5 * node)
        volume += filling
        first += filling * speed
        value += filling * sample
        slope += filling * speed * sample
    return volume, first, value, slope


def _with_slopes(volume: np.ndarray, first: np.ndarray, value: np.ndarray, slope: np.ndarray) -> np.ndarray:
    """Means of g over evenly filled bins, and what the slopes of the density add to their neighbours' factors."""
    centre, result = first / volume, value / volume
    tilt = slope - centre * value  # integral of g over the bin for a density with a slope of 1
    apart = centre[2:] - centre[:-2]  # the slope in every bin but the first and the last, from its neighbours
    result[2:] += tilt[1:-1] / apart / volume[2:]
    result[:-2] -= tilt[1:-1] / apart / volume[:-2]
    return result


def _product(values: np.ndarray, times: int) -> np.ndarray:
    """values^times by multiplication: numpy's own power has other last bits on other processors."""
    result = values
    for _ in range(times - 1):
        result = result * values
    return result
