"""Physical constants, SI. Literal digits, because bits of results must not change with another library's version.

Source: CODATA 2018 (E. Tiesinga, P. J. Mohr, D. B. Newell and B. N. Taylor, Rev. Mod. Phys. 93, 025010 (2021)).
"""

import math

E_CHARGE = 1.602176634e-19  # C, exact
BOLTZMANN = 1.380649e-23  # J/K, exact
E_MASS = 9.1093837015e-31  # kg
ATOMIC_MASS = 1.66053906660e-27  # kg
TOWNSEND = 1e-21  # V m^2
SPEED_1_EV = math.sqrt(2.0 * E_CHARGE / E_MASS)  # m/s, of an electron of 1 eV

# Gauss-Legendre, 4 points on (-1, 1) and their weights, as digits: numpy finds them by LAPACK, whose last bits depend
# on the processor. Exact for polynomials of degree 7.
GAUSS_LEGENDRE = (
    (-0.8611363115940526, 0.34785484513745357),
    (-0.33998104358485626, 0.6521451548625464),
    (0.33998104358485626, 0.6521451548625464),
    (0.8611363115940526, 0.34785484513745357),
)
