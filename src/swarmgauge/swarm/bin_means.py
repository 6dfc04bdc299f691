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
    nodes, weights = (np.array(column) for column in zip(*GAUSS_LEGENDRE, strict=True))
    middle, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    speed = middle[:, None] + half[:, None] * nodes
    filling = half[:, None] * weights * speed**volume_power
    volume = np.sum(filling, axis=1)
    centre = np.sum(filling * speed, axis=1) / volume
    even = np.sum(filling * speed**power, axis=1) / volume
    tilt = np.sum(filling * (speed - centre[:, None]) * speed**power, axis=1)  # integral for a slope of 1
    result = even
    apart = centre[2:] - centre[:-2]  # the slope in every bin but the first and the last, from its neighbours
    result[2:] += tilt[1:-1] / apart / volume[2:]
    result[:-2] -= tilt[1:-1] / apart / volume[:-2]
    return result
