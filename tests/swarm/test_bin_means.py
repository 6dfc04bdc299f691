"""Moments of a distribution in bins against exact integrals."""

import numpy as np
import pytest
from scipy.special import gamma, gammainc

from swarmgauge.swarm.bin_means import bin_weights
from swarmgauge.swarm.reduce import lab_edges


@pytest.mark.parametrize(("volume", "power", "least"), [(2, 1, 1e-5), (3, 2, 1.2e-4)])
def test_moments_of_the_distribution_of_druyvesteyn(volume, power, least):
    # Counts of w^volume exp(-(w/s)^4) are differences of incomplete gamma functions; s = 0.04 is 1.4 meV. The density
    # of v_z vanishes at rest, so that its first bins tell less.
    edges = lab_edges()

    def up_to(k, speed, scale):
        return gammainc((k + 1) / 4, (speed / scale) ** 4) * gamma((k + 1) / 4) / 4 * scale ** (k + 1)

    errors = []
    for scale in (0.04, 0.08, 0.16):
        counts = np.diff(up_to(volume, edges, scale))
        exact = up_to(volume + power, edges[-1], scale)
        errors.append(abs(np.sum(counts * bin_weights(edges, volume, power)) / exact - 1))
    assert errors[0] < least
    assert errors[0] > 10 * errors[1] > 0.0  # of fourth order while the bins are of equal width
    assert errors[2] < 2e-6


@pytest.mark.parametrize(("volume", "power"), [(2, 1), (3, 2)])
def test_even_filling_is_exact(volume, power):
    # No bin but the first and the last has a neighbour on one side only.
    edges = np.linspace(1.0, 2.0, 11)
    counts = np.diff(edges ** (volume + 1))
    exact = (volume + 1) / (volume + power + 1) * (2.0 ** (volume + power + 1) - 1.0)
    assert np.sum(counts * bin_weights(edges, volume, power)) == pytest.approx(exact, rel=1e-12)
