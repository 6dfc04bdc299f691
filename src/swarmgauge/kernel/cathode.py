"""Electrons that leave a plane one after the other, followed in space instead of time.

A steady current from the plane z = 0 is the sum over electrons emitted at different times: the density at z is the time
that one emitted electron, with all its descendants, spends there. So every candidate scores weight / M into the bin of
its z, as in `record`; there are no windows and no comb. Where descendants fill the lanes, every second electron is
dropped by roulette and the others weigh twice.
"""

import math
from functools import cache

import numpy as np
from numba import njit

from .bits import load, load_int, prefer_wide_vectors, store, store_int
from .build import compiled, kernel_digest
from .cohort import FULL, RUNNING, STUCK
from .collide import collide, retire
from .flight import fly
from .functions import sincos_turn
from .lanes import (
    CUT,
    ELECTRON_FIELDS,
    INVERSE_M,
    INVERSE_M_GAS,
    LAB_CELL,
    LEFT,
    OUTCOME,
    SLOT,
    VX,
    VY,
    VZ,
    VZ_BEFORE,
    WEIGHT,
    X,
    Z,
)
from .lookup import LAB_CELLS
from .record import list_ended, list_rare
from .streams import next_word, one_to_two

HORIZON = 1048576.0  # time left at the start of every flight: longer ones are cut, and exactly so
CROWDED = 0.75  # of the lanes


@njit(forceinline=True)
def emit(rows, size, lanes, energy_edges, cumulated, forward):
    """Place `size` electrons at z = 0 with energies drawn from a histogram (see `start.place`) and weight 1.

    forward : all along z; otherwise with the cosine law of an emitting surface, cos^2(theta) uniform.
    """
    for lane in range(size):
        u = one_to_two(next_word(rows, lane, lanes)) - 1.0
        cell = np.searchsorted(cumulated, u, side="right") - 1
        share = cumulated[cell + 1] - cumulated[cell]
        part = (u - cumulated[cell]) / share if share > 0.0 else 0.5
        speed = math.sqrt(energy_edges[cell] + part * (energy_edges[cell + 1] - energy_edges[cell]))
        square = 1.0 if forward else one_to_two(next_word(rows, lane, lanes)) - 1.0
        sine, cosine = sincos_turn(one_to_two(next_word(rows, lane, lanes)))
        across = speed * math.sqrt(1.0 - square)
        store(rows, lane + VX * lanes, across * cosine)
        store(rows, lane + VY * lanes, across * sine)
        store(rows, lane + VZ * lanes, speed * math.sqrt(square))
        for axis in range(X, Z + 1):
            store(rows, lane + axis * lanes, 0.0)
        store(rows, lane + LEFT * lanes, HORIZON)
        store(rows, lane + WEIGHT * lanes, 1.0)
        store(rows, lane + SLOT * lanes, float(lane))


@njit(forceinline=True)
def drop_gone(active, rows, field, reach, absorbing, lanes):
    """Mark the electrons that left the region or hit the plane on their last flight; the others get a new horizon.

    The way of a flight is a parabola: one that ends in front of the plane may have touched it at its turning point.
    """
    for i in range(active):
        z = load(rows, i + Z * lanes)
        vz = load(rows, i + VZ_BEFORE * lanes)
        gain = field * (HORIZON - load(rows, i + LEFT * lanes))
        turned = 0.0 < vz < gain and 2.0 * field * z < vz * vz
        gone = z > reach or (absorbing and (z < 0.0 or turned)) or z < -reach
        store(rows, i + LEFT * lanes, -1.0 if gone else HORIZON)
        if gone:
            store(rows, i + INVERSE_M * lanes, 0.0)
            store(rows, i + INVERSE_M_GAS * lanes, 0.0)
            store_int(rows, i + OUTCOME * lanes, CUT)


@njit(forceinline=True)
def score_places(active, rows, histogram, velocity, width, lanes):
    """Add the candidates of one step to the bins of z.

    histogram : (bins * LAB_CELLS,), sums of weight / M by z and speed; velocity : (bins,), of v_z x weight / M.
    """
    bins = velocity.size
    for i in range(active):
        z = load(rows, i + Z * lanes)
        at = int(z / width)
        if z < 0.0 or at >= bins:
            continue
        inverse = load(rows, i + INVERSE_M * lanes)
        histogram[at * LAB_CELLS + load_int(rows, i + LAB_CELL * lanes)] += inverse
        velocity[at] += inverse * load(rows, i + VZ_BEFORE * lanes)


@njit(forceinline=True)
def thin_out(active, rows, lanes):
    """Roulette: every electron survives with probability 1/2 and then weighs twice."""
    for i in range(active):
        if next_word(rows, i, lanes) & np.uint64(1):
            store(rows, i + WEIGHT * lanes, 2.0 * load(rows, i + WEIGHT * lanes))
        else:
            store(rows, i + LEFT * lanes, -1.0)


@njit(inline="always")
def emission(
    tables, work, energy_edges, cumulated, forward, absorbing, size, batches, field, reach, width,
    histogram, velocity, max_steps, lanes, gases, thermal, angular,
):  # fmt: skip
    """Emit `batches` batches of `size` electrons and follow each until all are gone; returns the status.

    reach : z beyond which electrons are forgotten; width : of a bin. lanes, gases, thermal, angular : compile-time
    constants. histogram, velocity : see `score_places`, changed in place.
    """
    rows = work.rows
    for _ in range(batches):
        emit(rows, size, lanes, energy_edges, cumulated, forward)
        active = size
        steps = 0
        while active > 0:
            fly(active, tables, field, rows, lanes, gases, thermal, angular)
            drop_gone(active, rows, field, reach, absorbing, lanes)
            score_places(active, rows, histogram, velocity, width, lanes)
            alive = active
            rare = list_rare(active, rows, work.rare, lanes)
            alive = collide(rare, alive, tables, work.history, work, HORIZON, False, lanes, 1, angular)
            if alive < 0:
                return FULL
            if alive > CROWDED * lanes:
                thin_out(alive, rows, lanes)
            ended = list_ended(alive, rows, work.ended, lanes)
            active, _ = retire(work.ended, ended, alive, alive, rows, lanes, ELECTRON_FIELDS)
            steps += 1
            if steps > max_steps:
                return STUCK
    return RUNNING


@cache
def compiled_emission(lanes: int, gases: int, thermal: bool, angular: bool):
    """The entry kernel for its compile-time constants; takes the arguments of `emission` less the last four."""
    digest = kernel_digest()

    def run_emission(
        tables, work, energy_edges, cumulated, forward, absorbing, size, batches, field, reach, width,
        histogram, velocity, max_steps,
    ):  # fmt: skip
        digest  # noqa: B018 - part of the cache key
        prefer_wide_vectors()
        return emission(
            tables, work, energy_edges, cumulated, forward, absorbing, size, batches, field, reach, width,
            histogram, velocity, max_steps, lanes, gases, thermal, angular,
        )  # fmt: skip

    return compiled(run_emission)
