"""How many independent electrons a cohort is worth.

Electrons that descend from one ancestor within the memory of the swarm share its past: their displacements are
correlated, and what is estimated from n electrons has the error, and the bias of order 1/n, of fewer. Once a memory
(`lags` windows), families are counted: the distinct ancestors that live on, and the effective number of families
W^2 / sum W_a^2, W_a the weight of family a and W their sum (L. Kish, Survey Sampling, Wiley 1965, section 8.2).
"""

from numba import njit

from .bits import load, store
from .history import EFFECTIVE_SIZE, FAMILIES, MEMORIES
from .lanes import ANCESTOR, WEIGHT


@njit(forceinline=True)
def count_families(alive, rows, families, point_sums, lanes):
    """Add the families of one memory to the point sums. families : (lanes,), scratch."""
    for lane in range(lanes):
        store(families, lane, 0.0)
    for lane in range(alive):
        ancestor = int(load(rows, lane + ANCESTOR * lanes))
        store(families, ancestor, load(families, ancestor) + load(rows, lane + WEIGHT * lanes))
    distinct, total, squares = 0, 0.0, 0.0
    for lane in range(lanes):
        weight = load(families, lane)
        distinct += 1 if weight > 0.0 else 0
        total += weight
        squares += weight * weight
    point_sums[MEMORIES] += 1.0
    point_sums[FAMILIES] += distinct
    point_sums[EFFECTIVE_SIZE] += total * total / squares


@njit(forceinline=True)
def found_families(alive, rows, lanes):
    """Every electron becomes the ancestor of a family of its own."""
    for lane in range(alive):
        store(rows, lane + ANCESTOR * lanes, float(lane))
