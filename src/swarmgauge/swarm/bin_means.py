"""Mean values of powers of the speed from a distribution that is known as counts in speed bins.

Even filling of a bin would be wrong to second order in its width, which shows where the swarm has only a few bins:
0.2 % of the mean speed at 1.7 meV. The slope of the density, from the neighbouring bins, is taken into account as well:
what is left is of fourth order.
"""

import numpy as np

from swarmgauge.gas.constants import GAUSS_LEGENDRE


def bin_weights(edges: np.ndarray, volume_power: int, power: int) -> np.ndarray:
    """Factors whose sum with the counts is the integral of w^power; shape (bins,).

    edges : (bins + 1,), speeds, rising. The counts are integrals over bins of a density that is smooth on top of
    w^volume_power dw: 2 for f0, 3 for the velocity along the field, f1.
    """
    middle, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    volume, first, value, slope = (np.zeros(len(middle)) for _ in range(4))
    for node, weight in GAUSS_LEGENDRE:  # one after the other, as numpy's own order of sums depends on the processor
        speed = middle + half * node
        filling = half * weight * _product(speed, volume_power)
        volume += filling
        first += filling * speed
        value += filling * _product(speed, power)
        slope += filling * speed * _product(speed, power)
    centre, even = first / volume, value / volume
    tilt = slope - centre * value  # integral of w^power over the bin for a density with a slope of 1
    result = even
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
