"""Rare events: splitting and roulette of weighted electrons by energy.

An electron above the target weight of its energy is split into copies that share its weight, one far below it is kept
with probability weight / target and then carries the target. Both leave every expected sum as it was (H. Kahn and
T. E. Harris, NBS Appl. Math. Ser. 12, 27 (1951)). There is no comb: at the end of a window all weights are scaled to
the size of the cohort, which takes out growth.
"""

from numba import njit

from .bits import load, load_table, store
from .collide import copy_electron
from .history import score_path
from .lanes import LEFT, VX, VY, VZ, WEIGHT, X, Y, Z
from .lookup import energy_cell
from .streams import next_word, one_to_two

SPLIT_ABOVE = 1.9  # of the target weight
KEEP_ABOVE = 0.4
MOST_COPIES = 8
RESERVED_LANES = 64  # for the children of ionization


@njit(forceinline=True)
def split_and_roulette(active, alive, tables, history, work, window_time, lanes, lags):
    """Bring the weights of the first `active` electrons near their targets; returns the number alive.

    Copies take spare lanes while there are any; a copy's path begins, and that of the heavier one ends, here (see
    `history`). Electrons that lose the roulette are marked by a negative time left.
    """
    rows, target_weight = work.rows, tables.target_weight
    ordinary = work.growth[lags]  # weight of an electron that is not split
    lag_sums, point_sums = work.lag_sums, work.point_sums
    for lane in range(active):
        weight = load(rows, lane + WEIGHT * lanes)
        left = load(rows, lane + LEFT * lanes)
        if left <= 0.0:
            continue
        vx = load(rows, lane + VX * lanes)
        vy = load(rows, lane + VY * lanes)
        vz = load(rows, lane + VZ * lanes)
        target = ordinary * load_table(target_weight, energy_cell(vx * vx + vy * vy + vz * vz))
        if KEEP_ABOVE * target <= weight <= SPLIT_ABOVE * target:
            continue
        elapsed = window_time - left
        if weight > target:
            copies = min(int(weight / target), MOST_COPIES, lanes - RESERVED_LANES - alive + 1)
            if copies < 2:
                continue
            score_path(lane, 1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
            store(rows, lane + WEIGHT * lanes, weight / copies)
            score_path(lane, -1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
            for _ in range(copies - 1):
                copy_electron(rows, lane, alive, lanes)
                score_path(alive, -1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
                alive += 1
        else:
            score_path(lane, 1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
            if (one_to_two(next_word(rows, lane, lanes)) - 1.0) * target < weight:
                store(rows, lane + WEIGHT * lanes, target)
                score_path(lane, -1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
            else:
                store(rows, lane + LEFT * lanes, -1.0)
    return alive


@njit(forceinline=True)
def renormalise(alive, factor, rows, lanes):
    """Scale all weights; displacements since the start of the window begin anew."""
    for lane in range(alive):
        store(rows, lane + WEIGHT * lanes, factor * load(rows, lane + WEIGHT * lanes))
        store(rows, lane + X * lanes, 0.0)
        store(rows, lane + Y * lanes, 0.0)
        store(rows, lane + Z * lanes, 0.0)
