"""Densities of ejected energies against quadrature."""

import numpy as np
import pytest
from scipy import integrate

from swarmgauge.gas import ProcessError, Sharing

EDGES = np.concatenate([[0.0], np.geomspace(1e-3, 5e3, 2000)])


@pytest.mark.parametrize("width", [8.3, 15.8])
def test_published_density_of_ejected_energies(width):
    # C. B. Opal, W. K. Peterson, E. C. Beaty (1971): 1 / (1 + (energy / width)^2.1). Widths of hydrogen and helium,
    # from memory.
    cumulated = Sharing("width", width_eV=width).cumulated(EDGES)
    for energy in (0.5, 8.3, 100.0, 4000.0):
        exact = integrate.quad(lambda e: 1.0 / (1.0 + (e / width) ** 2.1), 0.0, energy, limit=200)[0]
        assert np.interp(energy, EDGES, cumulated) == pytest.approx(exact, rel=1e-4)


def test_table_of_ejected_energies():
    sharing = Sharing("table", ejected_eV=[0.0, 10.0, 20.0], density=[2.0, 1.0, 0.0])
    cumulated = sharing.cumulated(np.array([0.0, 5.0, 10.0, 20.0, 30.0]))
    np.testing.assert_allclose(cumulated, [0.0, 8.75, 15.0, 20.0, 20.0], rtol=1e-12)
    assert sharing == Sharing("table", ejected_eV=[0.0, 10.0, 20.0], density=[2.0, 1.0, 0.0])
    assert sharing != Sharing("width", width_eV=10.0)


@pytest.mark.parametrize(
    ("options", "message"),
    [
        ({"kind": "width"}, "width_eV = 0 is not possible"),
        ({"kind": "table"}, "ejected_eV has 0 and density 0 entries"),
        ({"kind": "table", "ejected_eV": [1.0, 2.0], "density": [1.0, 1.0]}, "does not rise from 0"),
        ({"kind": "table", "ejected_eV": [0.0, 2.0], "density": [0.0, 1.0]}, "above 0 at ejected_eV = 0"),
    ],
)
def test_impossible_sharing_is_refused(options, message):
    with pytest.raises(ProcessError, match=message):
        Sharing(**options)
