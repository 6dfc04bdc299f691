"""The record pass: time averages from the candidates of one step, and the lists of lanes that need more work.

A candidate is a flight that ended by the exponential law. The time average of g is the sum over candidates of
weight x g / M over the total weighted time, M being the majorant at the flight's start: candidates occur at rate M, so
that every dt contributes M dt x g / M = g dt on average. Counting candidates equally would be wrong by the variation
of M. A candidate of one gas (probability M_gas / M) counts with 1 / M_gas towards that gas.
"""

from numba import njit

from .bits import load, load_int, store
from .lanes import (
    FRACTION,
    GAS_CELL,
    INVERSE_M,
    INVERSE_M_GAS,
    LAB_CELL,
    LEFT,
    OUTCOME,
    RARE,
    RECOIL,
    VZ_BEFORE,
)
from .lookup import SPEED_CELLS


@njit(inline="always")
def record(active, rows, histogram, lab_histogram, recoil, counts, lanes, thermal):
    """Score the candidates of one step.

    histogram : (G * SPEED_CELLS, 2), flat; sums of weight / M_gas and of position in the cell x weight / M_gas.
    lab_histogram : (LAB_CELLS, 2), flat; sums of weight / M and of v_z x weight / M, v_z before the collision.
    recoil : (G,); energy given up in elastic recoil, only in a warm gas. counts : (4,) int64; flights by outcome.
    All are changed in place.
    """
    for i in range(active):
        counts[load_int(rows, i + OUTCOME * lanes)] += 1
        inverse_gas = load(rows, i + INVERSE_M_GAS * lanes)
        inverse = load(rows, i + INVERSE_M * lanes)
        cell = 2 * load_int(rows, i + GAS_CELL * lanes)
        store(histogram, cell, load(histogram, cell) + inverse_gas)
        at = load(histogram, cell + 1) + inverse_gas * load(rows, i + FRACTION * lanes)
        store(histogram, cell + 1, at)
        if thermal:
            gas = cell // (2 * SPEED_CELLS)
            store(recoil, gas, load(recoil, gas) + load(rows, i + RECOIL * lanes))
        cell = 2 * load_int(rows, i + LAB_CELL * lanes)
        store(lab_histogram, cell, load(lab_histogram, cell) + inverse)
        at = load(lab_histogram, cell + 1) + inverse * load(rows, i + VZ_BEFORE * lanes)
        store(lab_histogram, cell + 1, at)


@njit(forceinline=True)
def list_rare(active, rows, rare, lanes):
    """Fill `rare` with the lanes that wait for a rare event, in rising order; return their number."""
    count = 0
    for i in range(active):
        store(rare, count, i)
        count += 1 if load_int(rows, i + OUTCOME * lanes) == RARE else 0
    return count


@njit(forceinline=True)
def list_ended(active, rows, ended, lanes):
    """Fill `ended` with the lanes whose electron reached the window's end or was attached; return their number."""
    count = 0
    for i in range(active):
        store(ended, count, i)
        count += 1 if load(rows, i + LEFT * lanes) <= 0.0 else 0
    return count
