"""Names of the rows of the lane arrays. Row f of lane i is at index f * lanes + i (`lanes` is a compile-time constant).

Electron fields are copied when an electron is copied or moved; lane sums and random streams never are.
"""

# Electron fields (float64)
VX, VY, VZ = 0, 1, 2  # velocity
X, Y, Z = 3, 4, 5  # displacement since the start of the window
LEFT = 6  # time left until the end of the window; negative marks an electron that was attached
WEIGHT = 7
SLOT = 8  # row of the displacement history (an integer)
ELECTRON_FIELDS = 9

# Lane sums (float64): integrals over the flights of a lane, times the weight
SUM_TIME, SUM_ENERGY, SUM_Z = 0, 1, 2  # of 1, w^2 and z
LANE_SUMS = 3

# What the flight pass tells the later passes of the same step (float64)
FRACTION = 0  # position in the speed cell, 0 to 1
INVERSE_M = 1  # weight / majorant of the mixture; 0 for a flight that was cut
INVERSE_M_GAS = 2  # weight / majorant of the gas
REMAINDER = 3  # what selects the process: uniform in the gas's majorant, less its elastic frequency
UX, UY, UZ = 4, 5, 6  # velocity of the neutral
VZ_BEFORE = 7  # v_z at the end of the flight, before the collision
FLIGHT_NUMBERS = 8

# The same (int64)
GAS_CELL = 0  # gas * SPEED_CELLS + cell of the relative speed
LAB_CELL = 1  # cell of the electron's own speed, for the energy distribution
OUTCOME = 2
FLIGHT_CODES = 3

CUT, NULL, ELASTIC, RARE = 0, 1, 2, 3  # values of OUTCOME
