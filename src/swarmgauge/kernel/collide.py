"""The rare pass: excitation, ionization and attachment, lane by lane, and the moves of electrons between lanes.

Active electrons fill lanes 0 .. active-1, those whose window is over lanes active .. alive-1, the rest is spare.
"""

import math

from numba import njit

from .bits import load, load_int, load_table, store
from .flight import isotropic_direction, scattered
from .lanes import ELECTRON_FIELDS, FRACTION, GAS_CELL, LEFT, NX, NY, NZ, REMAINDER, UX, UY, UZ, VX, VY, VZ
from .lookup import ATTACHMENT, IONIZATION, SHARE_EQUAL, SHARE_UNIFORM, SPEED_CELLS
from .streams import next_word, one_to_two


@njit(forceinline=True)
def swap_electrons(rows, a, b, lanes):
    """Exchange the electrons of two lanes; streams and sums stay."""
    for field in range(ELECTRON_FIELDS):
        kept = load(rows, a + field * lanes)
        store(rows, a + field * lanes, load(rows, b + field * lanes))
        store(rows, b + field * lanes, kept)


@njit(forceinline=True)
def copy_electron(rows, source, target, lanes):
    """Copy all fields of an electron into a spare lane."""
    for field in range(ELECTRON_FIELDS):
        store(rows, target + field * lanes, load(rows, source + field * lanes))


@njit(forceinline=True)
def select_process(tables, gas_cell, fraction, remainder, gas, speed_cell):
    """Index of the process in which `remainder` falls, processes laid end to end; -1 if rounding leaves none."""
    first = load_table(tables.first_process, gas)
    last = load_table(tables.first_process, gas + 1)
    count = tables.kind.size
    for process in range(first, last):
        at = 2 * (speed_cell * count + process)
        low = load_table(tables.process, at)
        remainder -= low + fraction * (load_table(tables.process, at + 1) - low)
        if remainder < 0.0:
            return process
    return -1


@njit(forceinline=True)
def shared_energy(law, fixed_fraction, available, rows, lane, lanes):
    """Squared relative speed of the ejected electron: uniform on (0, available), half, or a fixed fraction of it."""
    if law == SHARE_UNIFORM:
        return available * (one_to_two(next_word(rows, lane, lanes)) - 1.0)
    if law == SHARE_EQUAL:
        return 0.5 * available
    return fixed_fraction * available


@njit(forceinline=True)
def collide(lane, alive, tables, rows, lanes):
    """One non-elastic event of a lane. Returns the process index, or -1 if none.

    Excitation and ionization: two-body kinematics with g'^2 = g^2 - loss, loss = threshold x (m + M) / M, so that the
    energy in the centre of mass falls by exactly the threshold. In ionization the two electrons share g'^2 and leave
    isotropically and independently about the centre of mass; the momentum of the ion is left out, an error of order
    m/M. The ejected electron is written to lane `alive` (which must be spare). Attachment marks the electron by a
    negative time left.
    """
    gas_cell = load_int(rows, lane + GAS_CELL * lanes)
    gas = gas_cell // SPEED_CELLS
    process = select_process(
        tables,
        gas_cell,
        load(rows, lane + FRACTION * lanes),
        load(rows, lane + REMAINDER * lanes),
        gas,
        gas_cell - gas * SPEED_CELLS,
    )
    if process < 0:
        return -1
    kind = load_table(tables.kind, process)
    if kind == ATTACHMENT:
        store(rows, lane + LEFT * lanes, -1.0)
        return process
    vx = load(rows, lane + VX * lanes)
    vy = load(rows, lane + VY * lanes)
    vz = load(rows, lane + VZ * lanes)
    ux = load(rows, lane + UX * lanes)
    uy = load(rows, lane + UY * lanes)
    uz = load(rows, lane + UZ * lanes)
    gx, gy, gz = vx - ux, vy - uy, vz - uz
    electron_part = load_table(tables.electron_part, gas)
    neutral_part = load_table(tables.neutral_part, gas)
    available = gx * gx + gy * gy + gz * gz - load_table(tables.loss, process)
    available = available if available > 0.0 else 0.0  # rounding at the threshold only: cells start above it
    if kind == IONIZATION:
        ejected = shared_energy(
            load_table(tables.sharing, process),
            load_table(tables.sharing_fraction, process),
            available,
            rows,
            lane,
            lanes,
        )
        available -= ejected
        copy_electron(rows, lane, alive, lanes)
        nx, ny, nz = isotropic_direction(next_word(rows, lane, lanes))
        x, y, z = scattered(
            vx, vy, vz, ux, uy, uz, math.sqrt(ejected), nx, ny, nz, electron_part, neutral_part
        )  # fmt: skip
        store(rows, alive + VX * lanes, x)
        store(rows, alive + VY * lanes, y)
        store(rows, alive + VZ * lanes, z)
    nx = load(rows, lane + NX * lanes)
    ny = load(rows, lane + NY * lanes)
    nz = load(rows, lane + NZ * lanes)
    x, y, z = scattered(
        vx, vy, vz, ux, uy, uz, math.sqrt(available), nx, ny, nz, electron_part, neutral_part
    )  # fmt: skip
    store(rows, lane + VX * lanes, x)
    store(rows, lane + VY * lanes, y)
    store(rows, lane + VZ * lanes, z)
    return process


@njit(forceinline=True)
def retire(ended, ended_count, active, alive, rows, lanes):
    """Move electrons whose window is over behind the active ones, and drop the attached ones; return both counts.

    `ended` lists lanes in rising order; it is worked from the back, so that a lane not yet treated is never moved.
    """
    for at in range(ended_count - 1, -1, -1):
        lane = ended[at]
        gone = load(rows, lane + LEFT * lanes) < 0.0
        active -= 1
        swap_electrons(rows, lane, active, lanes)
        if gone:
            alive -= 1
            swap_electrons(rows, active, alive, lanes)
    return active, alive
