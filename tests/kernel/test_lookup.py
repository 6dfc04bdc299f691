"""Cells by bit arithmetic against a search in their edges."""

import numpy as np
from numba import njit

from swarmgauge.kernel.lookup import (
    ENERGY_CELLS,
    SPEED_CELLS,
    energy_cell,
    energy_cell_edges,
    speed_cell,
    speed_edges,
)


@njit
def speed_cells(speed):
    cells, fractions = np.empty(speed.size, dtype=np.int64), np.empty(speed.size)
    for i in range(speed.size):
        cells[i], fractions[i] = speed_cell(speed[i])
    return cells, fractions


@njit
def energy_cells(energy):
    cells = np.empty(energy.size, dtype=np.int64)
    for i in range(energy.size):
        cells[i] = energy_cell(energy[i])
    return cells


def test_edges():
    for edges, cells in ((speed_edges(), SPEED_CELLS), (energy_cell_edges(), ENERGY_CELLS)):
        assert len(edges) == cells + 1
        assert edges[0] == 0.0
        assert (np.diff(edges) > 0).all()
    assert speed_edges()[-1] ** 2 > 1e4  # eV: the range that is promised
    assert energy_cell_edges()[-1] > 1e4
    steps = np.diff(speed_edges())
    assert steps[0] < 6e-4
    assert (steps[1000:] / speed_edges()[1001:]).max() < 3e-3


def test_speed_cells():
    edges = speed_edges()
    rng = np.random.default_rng(1)
    speed = np.concatenate([rng.uniform(0, 2, 100_000), np.geomspace(1e-12, 120.0, 100_000), edges[:-1]])
    cells, fractions = speed_cells(speed)
    found = np.searchsorted(edges, speed, side="right") - 1
    # w + offset rounds at 2^-53 of itself: only a speed that close to an edge may fall to its other side
    lower, upper = edges[cells], edges[cells + 1]
    slack = 2.0**-52 * (speed + 0.25)
    assert (np.flatnonzero(cells != found).size) < 3
    assert (speed >= lower - slack).all()
    assert (speed <= upper + slack).all()
    assert ((fractions >= 0) & (fractions < 1)).all()
    np.testing.assert_allclose(lower + fractions * (upper - lower), speed, rtol=1e-12, atol=1e-12)


def test_energy_cells():
    edges = energy_cell_edges()
    energy = np.concatenate([np.geomspace(1e-12, 1.6e4, 100_000), np.linspace(0, 10, 100_000), edges[:-1]])
    found = np.searchsorted(edges, energy, side="right") - 1
    assert np.flatnonzero(energy_cells(energy) != found).size < 3


def test_beyond_the_last_cell():
    cells, fractions = speed_cells(np.array([127.9, 128.0, 1e3, 1e100]))
    assert (cells == SPEED_CELLS - 1).all()
    assert (fractions < 1).all()
    assert (energy_cells(np.array([16384.0, 1e5, 1e200])) == ENERGY_CELLS - 1).all()
