"""Rows of the lane array. Row f of lane i is at index f * lanes + i; `lanes` is a compile-time constant.

Electron fields are copied when an electron is copied or moved between lanes; sums never are, random streams only in
coupled runs (see `coupled`).
"""

# Electron fields
VX, VY, VZ = 0, 1, 2  # velocity
X, Y, Z = 3, 4, 5  # displacement since the start of the window
LEFT = 6  # time left until the end of the window; negative marks an electron that was attached
WEIGHT = 7
SLOT = 8  # row of the displacement history (a whole number)
ANCESTOR = 9  # lane of its ancestor at the start of the memory (a whole number)
IDENTITY = 10  # random word that names the electron, for coupled runs
ELECTRON_FIELDS = 11

# Random streams, four words each: for the flights, and for work of variable length. In coupled runs they move with the
# electron, and so stand next to its fields.
STREAM, SPARE_STREAM = 11, 15
COUPLED_FIELDS = 19

# Lane sums: integrals over the flights of a lane, times the weight, of 1, w^2 and z
SUM_TIME, SUM_ENERGY, SUM_Z = 19, 20, 21

# What the flight pass tells the later passes of the same step
FRACTION = 22  # position in the speed cell, 0 to 1
INVERSE_M = 23  # weight / majorant of the mixture; 0 for a flight that was cut
INVERSE_M_GAS = 24  # weight / majorant of the gas; likewise
REMAINDER = 25  # what selects the process: uniform in the gas's majorant, less its elastic frequency
UX, UY, UZ = 26, 27, 28  # velocity of the neutral
VZ_BEFORE = 29  # v_z at the end of the flight, before the collision
GAS_CELL = 30  # integer: gas * SPEED_CELLS + cell of the relative speed
LAB_CELL = 31  # integer: cell of the electron's own speed, for the energy distribution
OUTCOME = 32  # integer: CUT, NULL, ELASTIC or RARE
NX, NY, NZ = 33, 34, 35  # direction after the collision; with angular laws the same rows hold what fixes it:
UNIFORM, COS_AZIMUTH, SIN_AZIMUTH = NX, NY, NZ  # a random number in [1, 2) for cos chi, and the azimuth
RECOIL = 36  # warm gas: expected energy given up in elastic recoil x weight / majorant of the gas
ROWS = 37

CUT, NULL, ELASTIC, RARE = 0, 1, 2, 3


def lane_count(electrons: int) -> int:
    """Lanes for a cohort of `electrons`: half as many to spare, and rows 64 bytes off a multiple of 4096.

    Rows a multiple of 4096 bytes apart would all fall into one set of the first-level cache.
    """
    return -(-electrons * 3 // 2 // 512) * 512 + 8
