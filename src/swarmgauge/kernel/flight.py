"""The vector loop: one free flight and its collision for every active lane.

LLVM turns the loop into 4- or 8-wide vector code as long as it has no branches that stay branches, no calls, and only
loads and stores of `bits`. Sums are kept per lane, so that the result does not depend on the vector width.
"""

import math

from numba import njit

from .bits import load, load_table, store, store_int
from .functions import log, sincos_turn
from .lanes import (
    COS_AZIMUTH,
    CUT,
    ELASTIC,
    FRACTION,
    GAS_CELL,
    INVERSE_M,
    INVERSE_M_GAS,
    LAB_CELL,
    LEFT,
    NULL,
    NX,
    NY,
    NZ,
    OUTCOME,
    RARE,
    RECOIL,
    REMAINDER,
    SIN_AZIMUTH,
    STREAM,
    SUM_ENERGY,
    SUM_TIME,
    SUM_Z,
    UNIFORM,
    UX,
    UY,
    UZ,
    VX,
    VY,
    VZ,
    VZ_BEFORE,
    WEIGHT,
    X,
    Y,
    Z,
)
from .lookup import (
    ANGLE_ROWS,
    ENERGY_CELLS,
    LAB_COARSER,
    SPEED_CELLS,
    angle_row,
    drawn_cosine,
    energy_cell,
    speed_cell,
)
from .streams import advance_state, load_state, lower_one_to_two, one_to_two, store_state, upper_one_to_two

LEAST_SPEED = 1e-150  # stands for rest: no direction is needed there


@njit(forceinline=True)
def isotropic_direction(word):
    """Unit vector of an isotropic law from one 64-bit word: 32 bits for the cosine, 32 for the azimuth."""
    cosine = 2.0 * upper_one_to_two(word) - 3.0
    sine = math.sqrt(1.0 - cosine * cosine)
    sin_azimuth, cos_azimuth = sincos_turn(lower_one_to_two(word))
    return sine * cos_azimuth, sine * sin_azimuth, cosine


@njit(forceinline=True)
def deflected(ex, ey, ez, cosine, cos_azimuth, sin_azimuth):
    """The unit vector e turned by an angle chi, given by its cosine, in the plane of an azimuth about e.

    Two vectors across e without a branch: T. Duff et al., J. Comput. Graph. Tech. 6 (1), 1 (2017).
    """
    sine_squared = 1.0 - cosine * cosine
    sine = math.sqrt(sine_squared if sine_squared > 0.0 else 0.0)
    p, q = sine * cos_azimuth, sine * sin_azimuth
    sign = 1.0 if ez >= 0.0 else -1.0
    a = -1.0 / (sign + ez)
    b = ex * ey * a
    return (
        cosine * ex + p * (1.0 + sign * ex * ex * a) + q * b,
        cosine * ey + p * sign * b + q * (sign + ey * ey * a),
        cosine * ez - p * sign * ex - q * ey,
    )


@njit(forceinline=True)
def scattered(vx, vy, vz, ux, uy, uz, speed, nx, ny, nz, electron_part, neutral_part):
    """Electron velocity after a two-body collision: v' = V + M/(m + M) g' n, V the velocity of the centre of mass.

    electron_part = m/(m + M), neutral_part = M/(m + M); `speed` is the relative speed g' after the collision, n its
    direction. Exact for any mass ratio; with u = 0 the cold gas.
    """
    return (
        electron_part * vx + neutral_part * (ux + speed * nx),
        electron_part * vy + neutral_part * (uy + speed * ny),
        electron_part * vz + neutral_part * (uz + speed * nz),
    )


@njit(forceinline=True)
def normal_pair(word):
    """Two independent standard normal numbers from one 64-bit word (Box and Muller 1958), at most 6.7 in size."""
    radius = math.sqrt(-2.0 * log(2.0 - upper_one_to_two(word)))
    sine, cosine = sincos_turn(lower_one_to_two(word))
    return radius * cosine, radius * sine


@njit(inline="always")
def fly(active, tables, field, rows, lanes, gases, thermal, angular):
    """Fly every active lane to its next event and scatter it if that is an elastic collision.

    A flight ends at the first of: a candidate event at rate M (the majorant over the speeds reachable within the
    window time), the window time, the end of the synchronisation window. The exponential law has no memory, so a cut
    flight simply starts anew (null collision: H. R. Skullerud, J. Phys. D 1, 1567 (1968)).
    At a candidate event a gas is picked by its share of M, a neutral is drawn from its Maxwellian, and the event is
    real with probability nu(g)/M_gas, g the relative speed. Other than elastic events are left to the rare pass.

    active : number of lanes to move; field : acceleration along z; rows : (ROWS * lanes,), changed in place, see
    `lanes`; lanes, gases, thermal, angular : compile-time constants, the last whether any process has an angular law.
    """
    for i in range(active):
        # Random words: a fixed number for every flight, whatever comes of it.
        s0, s1, s2, s3 = load_state(rows, i + STREAM * lanes, lanes)
        word_time, s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
        word_event, s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
        word_direction, s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
        ux = uy = uz = 0.0
        if thermal:
            word_xy, s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
            word_z, s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
            ux, uy = normal_pair(word_xy)
            uz, _ = normal_pair(word_z)
        store_state(rows, i + STREAM * lanes, lanes, s0, s1, s2, s3)

        # Length of the flight.
        vx = load(rows, i + VX * lanes)
        vy = load(rows, i + VY * lanes)
        vz = load(rows, i + VZ * lanes)
        left = load(rows, i + LEFT * lanes)
        weight = load(rows, i + WEIGHT * lanes)
        across = vx * vx + vy * vy
        energy = across + vz * vz
        start = energy_cell(energy)
        inverse_majorant = load_table(tables.inverse_majorant, start)
        longest = load_table(tables.window_time, start)
        longest = longest if longest < left else left
        time = -log(2.0 - one_to_two(word_time)) * inverse_majorant
        reached = time < longest
        time = time if reached else longest

        # Motion with constant acceleration, and its exact integrals.
        gain = field * time
        z = load(rows, i + Z * lanes)
        weighted_time = weight * time
        store(rows, i + SUM_TIME * lanes, load(rows, i + SUM_TIME * lanes) + weighted_time)
        store(
            rows,
            i + SUM_ENERGY * lanes,
            load(rows, i + SUM_ENERGY * lanes) + weighted_time * (energy + gain * (vz + gain * (1.0 / 3.0))),
        )
        store(
            rows,
            i + SUM_Z * lanes,
            load(rows, i + SUM_Z * lanes) + weighted_time * (z + time * (0.5 * vz + gain * (1.0 / 6.0))),
        )
        store(rows, i + X * lanes, load(rows, i + X * lanes) + vx * time)
        store(rows, i + Y * lanes, load(rows, i + Y * lanes) + vy * time)
        store(rows, i + Z * lanes, z + time * (vz + 0.5 * gain))
        store(rows, i + LEFT * lanes, left - time)
        vz = vz + gain
        speed = math.sqrt(across + vz * vz)

        # Which gas, and the relative velocity.
        pick = (one_to_two(word_event) - 1.0) * load_table(tables.majorant, start + (gases - 1) * ENERGY_CELLS)
        gas = 0
        below = 0.0
        above = load_table(tables.majorant, start)
        for other in range(1, gases):
            bound = load_table(tables.majorant, start + (other - 1) * ENERGY_CELLS)
            later = pick >= bound
            gas = other if later else gas
            below = bound if later else below
            above = load_table(tables.majorant, start + other * ENERGY_CELLS) if later else above
        lab_cell, fraction = speed_cell(speed)
        cell = lab_cell
        relative = speed
        gx, gy, gz = vx, vy, vz
        if thermal:
            width = load_table(tables.neutral_speed, gas)
            ux = width * ux
            uy = width * uy
            uz = width * uz
            gx = vx - ux
            gy = vy - uy
            gz = vz - uz
            relative = math.sqrt(gx * gx + gy * gy + gz * gz)
            cell, fraction = speed_cell(relative)
            store(rows, i + UX * lanes, ux)
            store(rows, i + UY * lanes, uy)
            store(rows, i + UZ * lanes, uz)

        row, place = angle_row(cell, fraction)

        # Elastic, something else, or null?
        cell = cell + gas * SPEED_CELLS
        low = load_table(tables.collision, 4 * cell)
        elastic = low + fraction * (load_table(tables.collision, 4 * cell + 1) - low)
        low = load_table(tables.collision, 4 * cell + 2)
        total = low + fraction * (load_table(tables.collision, 4 * cell + 3) - low)
        remainder = pick - below - elastic
        is_elastic = reached and remainder < 0.0
        is_real = reached and pick - below < total
        outcome = NULL if reached else CUT
        outcome = RARE if is_real else outcome
        outcome = ELASTIC if is_elastic else outcome
        store_int(rows, i + GAS_CELL * lanes, cell)
        store_int(rows, i + LAB_CELL * lanes, lab_cell >> LAB_COARSER)
        store_int(rows, i + OUTCOME * lanes, outcome)
        store(rows, i + FRACTION * lanes, fraction)
        store(rows, i + REMAINDER * lanes, remainder)
        store(rows, i + INVERSE_M * lanes, weight * inverse_majorant if reached else 0.0)
        inverse_gas = inverse_majorant if gases == 1 else 1.0 / (above - below)
        store(rows, i + INVERSE_M_GAS * lanes, weight * inverse_gas if reached else 0.0)
        store(rows, i + VZ_BEFORE * lanes, vz)
        electron_part = load_table(tables.electron_part, gas)
        neutral_part = load_table(tables.neutral_part, gas)
        if thermal:
            # Mean loss: 2 M/(m + M) V.g (1 - <cos chi>), V the velocity of the centre of mass.
            projection = electron_part * (vx * gx + vy * gy + vz * gz) + neutral_part * (ux * gx + uy * gy + uz * gz)
            recoil = 2.0 * neutral_part * projection * elastic * weight * inverse_gas
            if angular:
                at = load_table(tables.elastic_law, gas) * ANGLE_ROWS + row
                mean = load_table(tables.mean_cosine, at)
                recoil *= 1.0 - (mean + place * (load_table(tables.mean_cosine, at + 1) - mean))
            store(rows, i + RECOIL * lanes, recoil if reached else 0.0)

        # Elastic collision.
        if angular:
            uniform = upper_one_to_two(word_direction)
            sin_azimuth, cos_azimuth = sincos_turn(lower_one_to_two(word_direction))
            store(rows, i + UNIFORM * lanes, uniform)
            store(rows, i + COS_AZIMUTH * lanes, cos_azimuth)
            store(rows, i + SIN_AZIMUTH * lanes, sin_azimuth)
            cosine = drawn_cosine(tables.angles, load_table(tables.elastic_law, gas), row, place, uniform)
            inverse = 1.0 / (relative if relative > LEAST_SPEED else LEAST_SPEED)
            nx, ny, nz = deflected(gx * inverse, gy * inverse, gz * inverse, cosine, cos_azimuth, sin_azimuth)
        else:
            nx, ny, nz = isotropic_direction(word_direction)
            store(rows, i + NX * lanes, nx)
            store(rows, i + NY * lanes, ny)
            store(rows, i + NZ * lanes, nz)
        after_x, after_y, after_z = scattered(
            vx, vy, vz, ux, uy, uz, relative, nx, ny, nz,
            electron_part, neutral_part,
        )  # fmt: skip
        store(rows, i + VX * lanes, after_x if is_elastic else vx)
        store(rows, i + VY * lanes, after_y if is_elastic else vy)
        store(rows, i + VZ * lanes, after_z if is_elastic else vz)
