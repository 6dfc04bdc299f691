"""Putting the electrons of a cohort into their lanes at the start."""

import math
from functools import cache

import numpy as np
from numba import njit

from .bits import store
from .build import compiled, kernel_digest
from .flight import isotropic_direction
from .lanes import ANCESTOR, IDENTITY, LEFT, ROWS, SLOT, SPARE_STREAM, STREAM, VX, VY, VZ, WEIGHT
from .streams import next_word, one_to_two, seeded_streams


@njit(forceinline=True)
def place(rows, size, lanes, energy_edges, cumulated):
    """Electrons with energies drawn from a histogram, isotropic directions, weight 1.

    rows : (ROWS * lanes,), changed; energy_edges : (n + 1,), eV; cumulated : (n + 1,), from 0 to 1, share of electrons
    below each edge. Inside a cell the energy is uniform.
    """
    for lane in range(size):
        u = one_to_two(next_word(rows, lane, lanes)) - 1.0
        cell = np.searchsorted(cumulated, u, side="right") - 1
        share = cumulated[cell + 1] - cumulated[cell]
        part = (u - cumulated[cell]) / share if share > 0.0 else 0.5
        speed = math.sqrt(energy_edges[cell] + part * (energy_edges[cell + 1] - energy_edges[cell]))
        nx, ny, nz = isotropic_direction(next_word(rows, lane, lanes))
        store(rows, lane + VX * lanes, speed * nx)
        store(rows, lane + VY * lanes, speed * ny)
        store(rows, lane + VZ * lanes, speed * nz)
        store(rows, lane + LEFT * lanes, 0.0)
        store(rows, lane + WEIGHT * lanes, 1.0)
        store(rows, lane + SLOT * lanes, float(lane))
        store(rows, lane + ANCESTOR * lanes, float(lane))


@cache
def compiled_place():
    """The entry kernel of `place`."""
    digest = kernel_digest()

    def run_place(rows, size, lanes, energy_edges, cumulated):
        digest  # noqa: B018 - part of the cache key
        place(rows, size, lanes, energy_edges, cumulated)

    return compiled(run_place)


def seed_streams(rows, start, lanes):
    """Seed both streams of all lanes from the SplitMix64 state `start`; the electrons get their names."""
    states = seeded_streams(start, 2 * lanes)
    words = rows.view(np.uint64).reshape(ROWS, lanes)
    words[STREAM : STREAM + 4] = states[:, :lanes]
    words[SPARE_STREAM : SPARE_STREAM + 4] = states[:, lanes:]
    words[IDENTITY] = states[0, :lanes]


def launch(rows, start, size, lanes, energy_edges, cumulated):
    """Seed all streams from the SplitMix64 state `start` and place `size` electrons; see `place`."""
    seed_streams(rows, start, lanes)
    compiled_place()(rows, size, lanes, energy_edges, cumulated)
