"""Layout of the tables that the kernel reads, and the bit arithmetic that finds a cell.

Speed cells
    The cell of a speed w is read off the bits of w + SPEED_OFFSET: exponent and SPEED_BITS bits of the mantissa are the
    number, the rest of the mantissa is the position inside the cell. Cells are uniform near w = 0 (0.0005 sqrt(eV)) and
    logarithmic above (0.2 %), up to 16 keV. In a cell a collision frequency is linear in speed.
Energy cells
    Coarse cells for the majorant, found from w^2 without a square root.
"""

from typing import NamedTuple

import numpy as np
from numba import njit

from .bits import bits_of, double_of, load_table
from .functions import MANTISSA, ONE_BITS

SPEED_BITS = 9
SPEED_OFFSET = 0.25
SPEED_CELLS = 9 << SPEED_BITS  # 0.25 to 128: nine octaves
SPEED_TOP = 128.0 * (1.0 - 2.0**-52)
_SPEED_SHIFT = 52 - SPEED_BITS
_SPEED_FIRST = (1023 - 2) << SPEED_BITS

ENERGY_BITS = 5
ENERGY_OFFSET = 0.015625
ENERGY_CELLS = 20 << ENERGY_BITS  # 2^-6 to 2^14 eV: twenty octaves
ENERGY_TOP = 16384.0 * (1.0 - 2.0**-52)
_ENERGY_SHIFT = 52 - ENERGY_BITS
_ENERGY_FIRST = (1023 - 6) << ENERGY_BITS

LAB_COARSER = 3  # the energy distribution is kept on speed cells joined by 2^3
LAB_CELLS = SPEED_CELLS >> LAB_COARSER

ANGLE_COARSER = 4  # angular laws are kept at the edges of speed cells joined by 2^4, and linear in speed between
ANGLE_ROWS = (SPEED_CELLS >> ANGLE_COARSER) + 1
PART_BITS = 5
PARTS = 1 << PART_BITS  # of equal probability; cos chi is even in each
LAW_SIZE = ANGLE_ROWS * PARTS * 2  # numbers of one law
_PLACE_SHIFT = 52 - ANGLE_COARSER
_PART_SHIFT = 52 - PART_BITS


class Tables(NamedTuple):
    """Arrays of one mixture at one field; G gases, P non-elastic acting processes, all float64 unless said.

    majorant : (G, ENERGY_CELLS), flat; cumulated over gases: largest total collision frequency of gases 0..g within the
        speed window of the cell. The last row is the majorant of the mixture.
    inverse_majorant : (ENERGY_CELLS,); 1 / last row.
    window_time : (ENERGY_CELLS,); longest flight for which the majorant holds.
    collision : (G, SPEED_CELLS, 4), flat; elastic at the lower and upper end of the cell, then the total.
    process : (SPEED_CELLS, P, 2), flat; frequency of each non-elastic process at both ends; processes sorted by gas.
    first_process : (G + 1,) int64; processes of gas g are first_process[g] .. first_process[g + 1] - 1.
    kind : (P,) int64; EXCITATION, IONIZATION or ATTACHMENT.
    loss : (P,); energy loss as a drop of the squared relative speed: threshold x (m + M) / M; superelastic: negative.
    sharing, sharing_fraction : (P,) int64 and float64; law of energy sharing in ionization.
    ejected : (S, ENERGY_CELLS + 1), flat; cumulated densities of the ejected energy at the edges of the energy cells,
        each up to a factor; ejected_at : (P,) int64, where that of a process begins.
    energy_edges : (ENERGY_CELLS + 1,).
    angles : (laws, ANGLE_ROWS, PARTS, 2), flat; angular laws, range of cos chi in each part.
    mean_cosine : (laws, ANGLE_ROWS), flat. elastic_law : (G,) int64; law of each gas's elastic process.
    scattering_law, binary : (P,) int64; law of each process, and whether an ionization ejects as free electrons would.
    electron_part, neutral_part : (G,); m / (m + M) and M / (m + M).
    neutral_speed : (G,); standard deviation of one velocity component of the neutrals.
    target_weight : (ENERGY_CELLS,); weight that an electron of this energy should have, where electrons are split.
    net_frequency : (SPEED_CELLS, 2), flat; ionization minus attachment frequency of the mixture against the electron's
        own speed, averaged over the neutrals.
    """

    majorant: np.ndarray
    inverse_majorant: np.ndarray
    window_time: np.ndarray
    collision: np.ndarray
    process: np.ndarray
    first_process: np.ndarray
    kind: np.ndarray
    loss: np.ndarray
    sharing: np.ndarray
    sharing_fraction: np.ndarray
    ejected: np.ndarray
    ejected_at: np.ndarray
    energy_edges: np.ndarray
    angles: np.ndarray
    mean_cosine: np.ndarray
    elastic_law: np.ndarray
    scattering_law: np.ndarray
    binary: np.ndarray
    electron_part: np.ndarray
    neutral_part: np.ndarray
    neutral_speed: np.ndarray
    target_weight: np.ndarray
    net_frequency: np.ndarray


EXCITATION, IONIZATION, ATTACHMENT = 0, 1, 2
SHARE_UNIFORM, SHARE_EQUAL, SHARE_FIXED, SHARE_DENSITY = 0, 1, 2, 3


def speed_edges() -> np.ndarray:
    """Edges of the speed cells, sqrt(eV); shape (SPEED_CELLS + 1,)."""
    octave, part = np.divmod(np.arange(SPEED_CELLS + 1), 1 << SPEED_BITS)
    return np.ldexp(SPEED_OFFSET * (1.0 + part / (1 << SPEED_BITS)), octave) - SPEED_OFFSET


def energy_cell_edges() -> np.ndarray:
    """Edges of the majorant's energy cells, eV; shape (ENERGY_CELLS + 1,)."""
    octave, part = np.divmod(np.arange(ENERGY_CELLS + 1), 1 << ENERGY_BITS)
    return np.ldexp(ENERGY_OFFSET * (1.0 + part / (1 << ENERGY_BITS)), octave) - ENERGY_OFFSET


@njit(forceinline=True)
def speed_cell(speed):
    """(cell, position in the cell from 0 to 1) of a speed; speeds beyond 16 keV fall into the last cell."""
    shifted = speed + SPEED_OFFSET
    shifted = shifted if shifted < SPEED_TOP else SPEED_TOP
    bits = bits_of(shifted)
    fraction = double_of(((bits << SPEED_BITS) & MANTISSA) | ONE_BITS) - 1.0
    return (bits >> _SPEED_SHIFT) - _SPEED_FIRST, fraction


@njit(forceinline=True)
def energy_cell(energy):
    """Energy cell of the majorant; energies beyond 16 keV fall into the last cell."""
    shifted = energy + ENERGY_OFFSET
    shifted = shifted if shifted < ENERGY_TOP else ENERGY_TOP
    return (bits_of(shifted) >> _ENERGY_SHIFT) - _ENERGY_FIRST


@njit(forceinline=True)
def angle_row(cell, fraction):
    """(row, position from it to the next one) of the angular laws, from the cell of a speed and the position in it."""
    place = double_of(((cell << _PLACE_SHIFT) & MANTISSA) | ONE_BITS) - 1.0
    return cell >> ANGLE_COARSER, place + fraction * (1.0 / (1 << ANGLE_COARSER))


@njit(forceinline=True)
def drawn_cosine(angles, law, row, place, uniform):
    """cos chi of a law, 0 .. laws - 1; row, place : see `angle_row`; uniform : random, in [1, 2)."""
    bits = bits_of(uniform) & MANTISSA
    at = law * LAW_SIZE + row * (2 * PARTS) + 2 * (bits >> _PART_SHIFT)
    inside = double_of(((bits << PART_BITS) & MANTISSA) | ONE_BITS) - 1.0
    low = load_table(angles, at)
    low += place * (load_table(angles, at + 2 * PARTS) - low)
    high = load_table(angles, at + 1)
    high += place * (load_table(angles, at + 2 * PARTS + 1) - high)
    return low + inside * (high - low)


def angle_row_edges() -> np.ndarray:
    """Speeds of the rows of the angular laws, sqrt(eV); shape (ANGLE_ROWS,)."""
    return speed_edges()[:: 1 << ANGLE_COARSER]
