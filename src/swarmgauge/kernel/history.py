"""Displacement histories, and the sums from which flux and bulk diffusion follow.

Every electron carries the displacements of its line of ancestors over the last k windows, k = 1 .. lags, cumulated:
Z_k is the way gone in the last k complete windows. With z the way since the start of the present window, Z_k + z over a
long enough memory has (K. Kumar, H. R. Skullerud and R. E. Robson, Aust. J. Phys. 33, 343 (1980), for the transport
coefficients; the sums are derived in DEVELOPERS.md)

    D_flux = Cov(Z + z, v_z),   W_bulk = <v_z> + Cov(Z + z, R),
    D_bulk = D_flux + 1/2 <(dZ^2 - <dZ^2>) R>,   R = nu_ionization - nu_attachment.

Flux sums are exact time integrals: along one path the integral of (Z + z) v_z dt is Z z + z^2 / 2, that of (Z + z)^2
v_z dt is Z^2 z + Z z^2 + z^3 / 3. They are taken at the end of each electron's path (window end or attachment); a
child, which copies z of its parent, takes what stood there at its birth with a minus sign. The R sums are taken over
the population at the end of each window, and so are those with the energy, which have no such integral. What is of
third order or holds the energy is kept for the longest lag alone.
"""

import math

from numba import njit

from .bits import load, load_table, store
from .lanes import SLOT, VX, VY, VZ, WEIGHT, X, Y, Z
from .lookup import speed_cell

# Rows of the lag sums, (LAG_SUMS, lags); weighted sums over electrons
LAG_Z_TIME = 0  # Z_k t: integral of Z_k over time
LAG_Z_VZ = 1  # Z_k z: integral of Z_k v_z
LAG_XY_VXY = 2  # X_k x + Y_k y
LAG_Z, LAG_ZZ, LAG_Z_R, LAG_ZZ_R, LAG_TT, LAG_TT_R = 3, 4, 5, 6, 7, 8  # at window ends; T^2 = X^2 + Y^2
LAG_SUMS = 9

# Point sums, (POINT_SUMS,)
PATH = 0  # integral of v_z
PATH_SQUARED = 1  # z^2 / 2: integral of z v_z
PATH_ACROSS_SQUARED = 2  # (x^2 + y^2) / 2
END_WEIGHT, END_R = 3, 4  # at window ends: 1 and R
MEMORIES, FAMILIES, EFFECTIVE_SIZE = 5, 6, 7  # see `ancestry`
PATH_ZZ_VZ = 8  # integral of (Z + z)^2 v_z, longest lag
END_ZZZ, END_ZZZ_R = 9, 10  # at window ends, longest lag
END_VZ, END_ENERGY, END_ENERGY_VZ = 11, 12, 13  # at window ends; energy is w^2
END_Z_VZ, END_XY_VXY, END_Z_ENERGY_VZ, END_XY_ENERGY_VXY = 14, 15, 16, 17  # at window ends, longest lag
POINT_SUMS = 18


@njit(forceinline=True)
def score_path(lane, sign, elapsed, rows, history, lag_sums, point_sums, lanes, lags):
    """Add (sign +1, end of a path) or take away (-1, birth) the flux sums of the electron in `lane`.

    elapsed : time since the start of the window. history : (lanes, 3, lags), flat; cumulated displacements.
    """
    weight = sign * load(rows, lane + WEIGHT * lanes)
    x = load(rows, lane + X * lanes)
    y = load(rows, lane + Y * lanes)
    z = load(rows, lane + Z * lanes)
    point_sums[PATH] += weight * z
    point_sums[PATH_SQUARED] += 0.5 * weight * z * z
    point_sums[PATH_ACROSS_SQUARED] += 0.5 * weight * (x * x + y * y)
    row = 3 * lags * int(load(rows, lane + SLOT * lanes))
    for k in range(lags):
        past_z = load(history, row + 2 * lags + k)
        past_across = load(history, row + k) * x + load(history, row + lags + k) * y
        at = LAG_Z_TIME * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * elapsed * past_z)
        at = LAG_Z_VZ * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * z * past_z)
        at = LAG_XY_VXY * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * past_across)
    past_z = load(history, row + 3 * lags - 1)
    point_sums[PATH_ZZ_VZ] += weight * z * (past_z * (past_z + z) + z * z * (1.0 / 3.0))


@njit(forceinline=True)
def extend_history(lane, rows, history, extended, lanes, lags):
    """Write the history of the electron in `lane`, longer by the window that ends, to row `lane` of `extended`."""
    row = 3 * lags * int(load(rows, lane + SLOT * lanes))
    new = 3 * lags * lane
    for axis in range(3):
        way = load(rows, lane + (X + axis) * lanes)
        store(extended, new + axis * lags, way)
        for k in range(1, lags):
            store(extended, new + axis * lags + k, load(history, row + axis * lags + k - 1) + way)
    store(rows, lane + SLOT * lanes, float(lane))


@njit(forceinline=True)
def score_window_end(lane, net_frequency, rows, extended, lag_sums, point_sums, lanes, lags):
    """Add the R sums of the electron in `lane`, whose history has just been extended."""
    weight = load(rows, lane + WEIGHT * lanes)
    vx = load(rows, lane + VX * lanes)
    vy = load(rows, lane + VY * lanes)
    vz = load(rows, lane + VZ * lanes)
    energy = vx * vx + vy * vy + vz * vz
    cell, fraction = speed_cell(math.sqrt(energy))
    low = load_table(net_frequency, 2 * cell)
    rate = low + fraction * (load_table(net_frequency, 2 * cell + 1) - low)
    point_sums[END_WEIGHT] += weight
    point_sums[END_R] += weight * rate
    row = 3 * lags * lane
    for k in range(lags):
        x = load(extended, row + k)
        y = load(extended, row + lags + k)
        z = load(extended, row + 2 * lags + k)
        across = x * x + y * y
        at = LAG_Z * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * z)
        at = LAG_ZZ * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * z * z)
        at = LAG_Z_R * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * rate * z)
        at = LAG_ZZ_R * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * rate * z * z)
        at = LAG_TT * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * across)
        at = LAG_TT_R * lags + k
        store(lag_sums, at, load(lag_sums, at) + weight * rate * across)
    x = load(extended, row + lags - 1)
    y = load(extended, row + 2 * lags - 1)
    z = load(extended, row + 3 * lags - 1)
    along, across = weight * z * vz, weight * (x * vx + y * vy)
    point_sums[END_ZZZ] += weight * z * z * z
    point_sums[END_ZZZ_R] += weight * rate * z * z * z
    point_sums[END_VZ] += weight * vz
    point_sums[END_ENERGY] += weight * energy
    point_sums[END_ENERGY_VZ] += weight * energy * vz
    point_sums[END_Z_VZ] += along
    point_sums[END_XY_VXY] += across
    point_sums[END_Z_ENERGY_VZ] += energy * along
    point_sums[END_XY_ENERGY_VXY] += energy * across
