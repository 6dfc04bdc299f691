"""The rare pass: excitation, ionization and attachment, lane by lane, and the moves of electrons between lanes.

Active electrons fill lanes 0 .. active-1, those whose window is over lanes active .. alive-1, the rest is spare.
"""

import math

from numba import njit

from .bits import load, load_int, load_table, store, store_word
from .flight import LEAST_SPEED, deflected, isotropic_direction, scattered
from .history import score_path
from .lanes import (
    COS_AZIMUTH,
    ELECTRON_FIELDS,
    FRACTION,
    GAS_CELL,
    IDENTITY,
    LEFT,
    NX,
    NY,
    NZ,
    REMAINDER,
    SIN_AZIMUTH,
    UNIFORM,
    UX,
    UY,
    UZ,
    VX,
    VY,
    VZ,
)
from .lookup import (
    ATTACHMENT,
    IONIZATION,
    SHARE_DENSITY,
    SHARE_EQUAL,
    SHARE_UNIFORM,
    SPEED_CELLS,
    angle_row,
    drawn_cosine,
    energy_cell,
)
from .streams import next_word, one_to_two


@njit(forceinline=True)
def swap_electrons(rows, a, b, lanes, fields):
    """Exchange the first `fields` rows of two lanes: ELECTRON_FIELDS, or COUPLED_FIELDS with the random streams."""
    for field in range(fields):
        kept = load(rows, a + field * lanes)
        store(rows, a + field * lanes, load(rows, b + field * lanes))
        store(rows, b + field * lanes, kept)


@njit(forceinline=True)
def copy_electron(rows, source, target, lanes):
    """Copy all fields of an electron into a spare lane."""
    for field in range(ELECTRON_FIELDS):
        store(rows, target + field * lanes, load(rows, source + field * lanes))


@njit(forceinline=True)
def select_process(process, at, first, last, fraction, remainder):
    """Index, first .. last - 1, of the process in which `remainder` falls, processes laid end to end; -1 if none.

    process : frequencies at both ends of every cell; at : index of the row of the cell; fraction : position in it.
    """
    for index in range(first, last):
        low = load_table(process, at + 2 * index)
        remainder -= low + fraction * (load_table(process, at + 2 * index + 1) - low)
        if remainder < 0.0:
            return index
    return -1  # by rounding only


@njit(forceinline=True)
def ejected_below(ejected, at, energy_edges, energy):
    """Integral of the density of ejected energies, whose cumulated table begins at `at`, from 0 to `energy`."""
    cell = energy_cell(energy)
    low = load_table(energy_edges, cell)
    part = (energy - low) / (load_table(energy_edges, cell + 1) - low)
    below = load_table(ejected, at + cell)
    return below + (part if part < 1.0 else 1.0) * (load_table(ejected, at + cell + 1) - below)


@njit(forceinline=True)
def drawn_ejected(ejected, at, energy_edges, share):
    """The energy below which the integral of `ejected_below` is `share`, by bisection."""
    low, high = 0, energy_edges.size - 1
    while high - low > 1:
        middle = (low + high) >> 1
        if load_table(ejected, at + middle) <= share:
            low = middle
        else:
            high = middle
    below = load_table(ejected, at + low)
    density = load_table(ejected, at + low + 1) - below
    part = (share - below) / density if density > 0.0 else 0.0
    start = load_table(energy_edges, low)
    return start + (part if part < 1.0 else 1.0) * (load_table(energy_edges, low + 1) - start)


@njit(forceinline=True)
def shared_energy(law, fixed_fraction, available, ejected, at, energy_edges, rows, lane, lanes):
    """Squared relative speed of the ejected electron.

    Uniform on (0, available), half, a fixed fraction of it, or by a density on (0, available / 2).
    """
    if law == SHARE_UNIFORM:
        return available * (one_to_two(next_word(rows, lane, lanes)) - 1.0)
    if law == SHARE_EQUAL:
        return 0.5 * available
    if law == SHARE_DENSITY:
        uniform = one_to_two(next_word(rows, lane, lanes)) - 1.0
        drawn = drawn_ejected(
            ejected, at, energy_edges, uniform * ejected_below(ejected, at, energy_edges, 0.5 * available)
        )
        return drawn if drawn < 0.5 * available else 0.5 * available
    return fixed_fraction * available


@njit(forceinline=True)
def leave(lane, target, speed, nx, ny, nz, electron_part, neutral_part, rows, lanes):
    """Give the electron in `target` the velocity after a collision of that in `lane`, `speed` the relative one."""
    x, y, z = scattered(
        load(rows, lane + VX * lanes), load(rows, lane + VY * lanes), load(rows, lane + VZ * lanes),
        load(rows, lane + UX * lanes), load(rows, lane + UY * lanes), load(rows, lane + UZ * lanes),
        speed, nx, ny, nz, electron_part, neutral_part,
    )  # fmt: skip
    store(rows, target + VX * lanes, x)
    store(rows, target + VY * lanes, y)
    store(rows, target + VZ * lanes, z)


@njit(forceinline=True)
def axis(lane, rows, lanes):
    """Unit vector along the relative velocity of the electron and the neutral of its collision."""
    gx = load(rows, lane + VX * lanes) - load(rows, lane + UX * lanes)
    gy = load(rows, lane + VY * lanes) - load(rows, lane + UY * lanes)
    gz = load(rows, lane + VZ * lanes) - load(rows, lane + UZ * lanes)
    speed = math.sqrt(gx * gx + gy * gy + gz * gz)
    inverse = 1.0 / (speed if speed > LEAST_SPEED else LEAST_SPEED)
    return gx * inverse, gy * inverse, gz * inverse


@njit(forceinline=True)
def relative_energy(lane, rows, lanes):
    """Squared relative speed of the electron and the neutral of its collision."""
    gx = load(rows, lane + VX * lanes) - load(rows, lane + UX * lanes)
    gy = load(rows, lane + VY * lanes) - load(rows, lane + UY * lanes)
    gz = load(rows, lane + VZ * lanes) - load(rows, lane + UZ * lanes)
    return gx * gx + gy * gy + gz * gz


@njit(forceinline=True)
def collide(count, alive, tables, history, work, window_time, measuring, lanes, lags, angular):
    """The non-elastic events of one step, for the first `count` lanes of `work.rare`.

    Excitation and ionization: two-body kinematics with g'^2 = g^2 - loss, loss = threshold x (m + M) / M, so that the
    energy in the centre of mass falls by exactly the threshold. In ionization the two electrons share g'^2; the ejected
    one leaves isotropically about the centre of mass; the momentum of the ion is left out, an error of order m/M. With
    binary ejecta both leave as two free electrons would, one at rest before: in one plane with g, at right angles, the
    sum of their velocities along g (J. P. Boeuf and E. Marode, J. Phys. D 15, 2169 (1982)). The ejected electron
    takes a spare lane, and its path starts there (see `history`). Attachment marks the electron by a negative time left
    and ends its path.
    angular : compile-time constant, whether directions are still to be made from what `fly` left (see `lanes`).
    Returns the number of electrons alive, or -1 if no lane was spare.
    """
    # Arrays are taken out of their tuples before the loop: numba counts references at every such access.
    rows, rare, events = work.rows, work.rare, work.events
    lag_sums, point_sums = work.lag_sums, work.point_sums
    process_table, first_process, kind, loss = tables.process, tables.first_process, tables.kind, tables.loss
    sharing, sharing_fraction = tables.sharing, tables.sharing_fraction
    ejected_table, ejected_at, energy_edges = tables.ejected, tables.ejected_at, tables.energy_edges
    angles, scattering_law, binary = tables.angles, tables.scattering_law, tables.binary
    electron_parts, neutral_parts = tables.electron_part, tables.neutral_part
    processes = kind.size
    for at in range(count):
        if alive >= lanes:
            return -1
        lane = rare[at]
        cell = load_int(rows, lane + GAS_CELL * lanes)
        gas = cell // SPEED_CELLS
        process = select_process(
            process_table,
            2 * processes * (cell - gas * SPEED_CELLS),
            first_process[gas],
            first_process[gas + 1],
            load(rows, lane + FRACTION * lanes),
            load(rows, lane + REMAINDER * lanes),
        )
        if process < 0:
            continue
        if measuring:
            events[process] += 1
        elapsed = window_time - load(rows, lane + LEFT * lanes)
        if kind[process] == ATTACHMENT:
            score_path(lane, 1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
            store(rows, lane + LEFT * lanes, -1.0)
            continue
        electron_part, neutral_part = electron_parts[gas], neutral_parts[gas]
        available = relative_energy(lane, rows, lanes) - loss[process]
        available = available if available > 0.0 else 0.0  # rounding at the threshold only: cells start above it
        if angular:
            ex, ey, ez = axis(lane, rows, lanes)
            cos_azimuth = load(rows, lane + COS_AZIMUTH * lanes)
            sin_azimuth = load(rows, lane + SIN_AZIMUTH * lanes)
            row, place = angle_row(cell - gas * SPEED_CELLS, load(rows, lane + FRACTION * lanes))
            cosine = drawn_cosine(angles, scattering_law[process], row, place, load(rows, lane + UNIFORM * lanes))
        if kind[process] == IONIZATION:
            ejected = shared_energy(
                sharing[process], sharing_fraction[process], available,
                ejected_table, ejected_at[process], energy_edges, rows, lane, lanes,
            )  # fmt: skip
            copy_electron(rows, lane, alive, lanes)
            word = next_word(rows, lane, lanes)
            store_word(rows, alive + IDENTITY * lanes, word)
            nx, ny, nz = isotropic_direction(word)
            if angular and binary[process]:
                share = ejected / available if available > 0.0 else 0.5
                nx, ny, nz = deflected(ex, ey, ez, math.sqrt(share), -cos_azimuth, -sin_azimuth)
                cosine = math.sqrt(1.0 - share)
            available -= ejected
            leave(lane, alive, math.sqrt(ejected), nx, ny, nz, electron_part, neutral_part, rows, lanes)
            score_path(alive, -1.0, elapsed, rows, history, lag_sums, point_sums, lanes, lags)
            alive += 1
        if angular:
            nx, ny, nz = deflected(ex, ey, ez, cosine, cos_azimuth, sin_azimuth)
        else:
            nx = load(rows, lane + NX * lanes)
            ny = load(rows, lane + NY * lanes)
            nz = load(rows, lane + NZ * lanes)
        leave(lane, lane, math.sqrt(available), nx, ny, nz, electron_part, neutral_part, rows, lanes)
    return alive


@njit(forceinline=True)
def retire(ended, ended_count, active, alive, rows, lanes, fields):
    """Move electrons whose window is over behind the active ones, and drop the attached ones; return both counts.

    `ended` lists lanes in rising order; it is worked from the back, so that a lane not yet treated is never moved.
    """
    for at in range(ended_count - 1, -1, -1):
        lane = ended[at]
        gone = load(rows, lane + LEFT * lanes) < 0.0
        active -= 1
        swap_electrons(rows, lane, active, lanes, fields)
        if gone:
            alive -= 1
            swap_electrons(rows, active, alive, lanes, fields)
    return active, alive
