"""What the rates would be if the electrons had a Maxwellian distribution of the same mean energy.

Fluid models often assume one. For a frequency nu(w), w the speed in sqrt(eV) and theta = 2/3 of the mean energy,

    <nu> = 4 / (sqrt(pi) theta^3/2)  int nu(w) w^2 exp(-w^2/theta) dw,

by two Gauss points in each speed cell, where nu is linear. Values at fixed energies, 32 in an octave, are computed when
they are first needed; between them ln <nu> is interpolated by a cubic in energy. No operation depends on the processor.
"""

from collections.abc import Sequence

import numpy as np

from swarmgauge.gas.power import strict_exp, strict_log
from swarmgauge.kernel.lookup import speed_edges

from .curves import ProcessCurve

NODES_PER_OCTAVE = 32
_ROOT_PI = 1.7724538509055161
_GAUSS = (0.21132486540518713, 0.7886751345948129)  # Legendre, 2 points on (0, 1), both of weight 1/2


class MaxwellianRates:
    """Frequencies of curves, in the unit of the curves, averaged over Maxwellians.

    curves : of one gas. The motion of its neutrals is part of the energy asked for: 3/2 kT m/M is added.
    """

    def __init__(self, curves: Sequence[ProcessCurve]):
        self._low = np.array([curve.low for curve in curves])
        self._high = np.array([curve.high for curve in curves])
        self._logarithms: dict[int, np.ndarray] = {}

    def frequencies(self, mean_energy_eV: np.ndarray) -> np.ndarray:
        """Averages at mean energies > 0, shape (n,); returns (n, curves)."""
        mantissa, exponent = np.frexp(mean_energy_eV)  # mantissa from 1/2 to 1
        nodes = (exponent - 1) * NODES_PER_OCTAVE + ((2.0 * mantissa - 1.0) * NODES_PER_OCTAVE).astype(np.int64)
        result = np.empty((len(mean_energy_eV), len(self._low)))
        for node in np.unique(nodes):
            at = nodes == node
            result[at] = self._between(int(node), mean_energy_eV[at])
        return result

    def _between(self, node: int, energy: np.ndarray) -> np.ndarray:
        """Interpolation between `node` and the next one, from four nodes around; (n, curves)."""
        around = range(node - 1, node + 3)
        places = [_node_energy(other) for other in around]
        logarithm = np.zeros((len(energy), len(self._low)))
        for other, place in zip(around, places, strict=True):
            weight = np.ones(len(energy))
            for third in places:
                if third != place:
                    weight = weight * ((energy - third) / (place - third))
            logarithm += weight[:, None] * self._at(other)
        never = np.isnan(logarithm)  # an average of 0 at one of the nodes
        return np.where(never, 0.0, strict_exp(np.where(never, 0.0, logarithm)))

    def _at(self, node: int) -> np.ndarray:
        """ln of the averages at a node, (curves,); NaN for 0."""
        if node not in self._logarithms:
            low, high = _weights(_node_energy(node))
            average = np.cumsum(self._low * low + self._high * high, axis=1)[:, -1]
            self._logarithms[node] = np.where(average > 0.0, strict_log(np.where(average > 0.0, average, 1.0)), np.nan)
        return self._logarithms[node]


def _node_energy(node: int) -> float:
    octave, part = divmod(node, NODES_PER_OCTAVE)
    return float(np.ldexp(1.0 + part / NODES_PER_OCTAVE, octave))


def _weights(mean_energy_eV: float) -> tuple[np.ndarray, np.ndarray]:
    """Weights of the values at the lower and upper ends of the speed cells in the average; each (SPEED_CELLS,)."""
    edges = speed_edges()
    width = np.diff(edges)
    theta = mean_energy_eV * (2.0 / 3.0)
    low, high = np.zeros(len(width)), np.zeros(len(width))
    for part in _GAUSS:
        square = (edges[:-1] + part * width) ** 2
        share = 0.5 * width * square * strict_exp(-square / theta)
        low += (1.0 - part) * share
        high += part * share
    factor = 4.0 / (_ROOT_PI * theta * np.sqrt(theta))
    return factor * low, factor * high
