"""A swarm seen at one place: every electron weighs exp(-alpha z).

The density of a steady-state Townsend swarm grows as exp(alpha z). In a swarm that is uniform but for this weight,

    G(v, t) = int n(z, v, t) exp(-alpha z) dz,   dG/dt + a dG/dv_z = collisions - alpha v_z G,

so that G is the velocity distribution at any place of the steady swarm, once alpha is such that G neither grows nor
decays (integrate the Boltzmann equation by parts; K. Kumar, H. R. Skullerud and R. E. Robson, Aust. J. Phys. 33, 343
(1980), for the operator). The weight of the way gone in the present window is applied where something is scored; at
the end of the window it becomes part of the electron's own, and the comb makes weights equal again.
"""

from numba import njit

from .bits import load, store
from .functions import exp
from .lanes import INVERSE_M, INVERSE_M_GAS, RECOIL, WEIGHT, Z


@njit(forceinline=True)
def tilt_scores(active, alpha, rows, lanes):
    """Weigh what the flights of the first `active` lanes have left to be scored; alpha in kernel units."""
    for i in range(active):
        factor = exp(-alpha * load(rows, i + Z * lanes))
        store(rows, i + INVERSE_M * lanes, factor * load(rows, i + INVERSE_M * lanes))
        store(rows, i + INVERSE_M_GAS * lanes, factor * load(rows, i + INVERSE_M_GAS * lanes))
        store(rows, i + RECOIL * lanes, factor * load(rows, i + RECOIL * lanes))


@njit(forceinline=True)
def tilt_weights(alive, alpha, rows, lanes):
    """Weigh the electrons by the way that they have gone in the window that ends."""
    for lane in range(alive):
        factor = exp(-alpha * load(rows, lane + Z * lanes))
        store(rows, lane + WEIGHT * lanes, factor * load(rows, lane + WEIGHT * lanes))
