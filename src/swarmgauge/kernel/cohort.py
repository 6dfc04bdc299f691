"""One cohort: windows of free steps, then the comb that brings the population back to its size."""

from functools import cache
from typing import NamedTuple

import numpy as np
from numba import njit

from .ancestry import count_families, found_families
from .bits import load, prefer_wide_vectors, store
from .build import compiled, kernel_digest
from .collide import collide, retire, swap_electrons
from .coupled import begin_streams, resample
from .flight import fly
from .history import LAG_SUMS, PATH, POINT_SUMS, extend_history, score_path, score_window_end
from .lanes import COUPLED_FIELDS, ELECTRON_FIELDS, LEFT, ROWS, SUM_ENERGY, SUM_TIME, SUM_Z, WEIGHT, X, Y, Z
from .lookup import LAB_CELLS, SPEED_CELLS
from .record import list_ended, list_rare, record
from .split import renormalise, split_and_roulette
from .streams import next_word, one_to_two
from .tilt import tilt_scores, tilt_weights

# Status of a cohort
RUNNING, FULL, EXTINCT, STUCK = 0, 1, 2, 3

# How the population is brought back to its size: a comb of equal weights; weights that follow the energy where rare
# events are asked for; each electron by its own random number in coupled runs
COMBED, SPLIT, COUPLED = 0, 1, 2

# Columns of the series, one row a window
SERIES_TIME, SERIES_ENERGY, SERIES_Z, SERIES_PATH, SERIES_ALIVE = 0, 1, 2, 3, 4
SERIES_COLUMNS = 5


class Workspace(NamedTuple):
    """All arrays of one cohort that change; see `lanes`, `record` and `history` for the layouts."""

    rows: np.ndarray  # (ROWS * lanes,)
    combed: np.ndarray  # (ELECTRON_FIELDS * lanes,), target of the comb
    history: np.ndarray  # (lanes * 3 * lags,)
    other_history: np.ndarray  # the same, target of the next window
    population: np.ndarray  # (2,) int64; electrons at the start of the next window, and its number
    families: np.ndarray  # (lanes,), see `ancestry`
    growth: np.ndarray  # (lags + 1,), see `past_growth`
    rare: np.ndarray  # (lanes + 1,) int64
    ended: np.ndarray  # (lanes + 1,) int64
    histogram: np.ndarray  # (G * SPEED_CELLS * 2,)
    lab_histogram: np.ndarray  # (LAB_CELLS * 2,)
    recoil: np.ndarray  # (G,)
    lag_sums: np.ndarray  # (LAG_SUMS * lags,)
    point_sums: np.ndarray  # (POINT_SUMS,)
    counts: np.ndarray  # (4,) int64; flights by outcome
    events: np.ndarray  # (P + 1,) int64; events seen of each non-elastic process


def new_workspace(lanes: int, lags: int, gases: int, processes: int) -> Workspace:
    """Zeroed arrays of a cohort with `lanes` lanes."""
    return Workspace(
        rows=np.zeros(ROWS * lanes),
        combed=np.zeros(ELECTRON_FIELDS * lanes),
        history=np.zeros(lanes * 3 * lags),
        other_history=np.zeros(lanes * 3 * lags),
        population=np.zeros(2, dtype=np.int64),
        families=np.zeros(lanes),
        growth=np.ones(lags + 1),
        rare=np.zeros(lanes + 1, dtype=np.int64),
        ended=np.zeros(lanes + 1, dtype=np.int64),
        histogram=np.zeros(gases * SPEED_CELLS * 2),
        lab_histogram=np.zeros(LAB_CELLS * 2),
        recoil=np.zeros(gases),
        lag_sums=np.zeros(LAG_SUMS * lags),
        point_sums=np.zeros(POINT_SUMS),
        counts=np.zeros(4, dtype=np.int64),
        events=np.zeros(processes + 1, dtype=np.int64),
    )


@njit(forceinline=True)
def total_weight(alive, rows, lanes):
    """Sum of the weights of the electrons alive, in lane order."""
    total = 0.0
    for lane in range(alive):
        total += load(rows, lane + WEIGHT * lanes)
    return total


@njit(forceinline=True)
def past_growth(total, size, window, growth, lags):
    """Growth over the last memory, with that of the window that ends: the weight of the next one.

    A population held at a finite size n has biases of order 1/n: it is thinned just where electrons multiply. Weighting
    a state by how much the population grew on the way to it undoes that, exactly as far back as the product reaches (N.
    Cerf and O. C. Martin, Phys. Rev. E 51, 3679 (1995)). growth : (lags + 1,), changed; factors of the last
    windows, and their product, the weight that the window began with.
    """
    growth[window % lags] = total / (size * growth[lags])
    product = 1.0
    for k in range(lags):
        product *= growth[k]
    growth[lags] = product
    return product


@njit(forceinline=True)
def comb(alive, size, total, weight, rows, combed, lanes):
    """Systematic resampling of `alive` electrons of summed weight `total` to `size` of equal `weight`, in lane order.

    Teeth at (j + u) W / size, u one random number and W the total weight: every electron is taken weight x size / W
    times on average. Displacements since the start of the window begin anew.
    """
    spacing = total / size
    tooth = (one_to_two(next_word(rows, 0, lanes)) - 1.0) * spacing
    lane = 0
    upper = load(rows, WEIGHT * lanes)
    for j in range(size):
        while upper <= tooth and lane < alive - 1:
            lane += 1
            upper += load(rows, lane + WEIGHT * lanes)
        for field in range(ELECTRON_FIELDS):
            store(combed, j + field * lanes, load(rows, lane + field * lanes))
        store(combed, j + X * lanes, 0.0)
        store(combed, j + Y * lanes, 0.0)
        store(combed, j + Z * lanes, 0.0)
        store(combed, j + WEIGHT * lanes, weight)
        tooth += spacing
    for field in range(ELECTRON_FIELDS):
        for j in range(size):
            store(rows, j + field * lanes, load(combed, j + field * lanes))


@njit(forceinline=True)
def add_lane_sums(rows, lanes, series, window):
    """Move the lane sums of a window, in lane order, into row `window` of the series."""
    time, energy, z = 0.0, 0.0, 0.0
    for lane in range(lanes):
        time += load(rows, lane + SUM_TIME * lanes)
        energy += load(rows, lane + SUM_ENERGY * lanes)
        z += load(rows, lane + SUM_Z * lanes)
        store(rows, lane + SUM_TIME * lanes, 0.0)
        store(rows, lane + SUM_ENERGY * lanes, 0.0)
        store(rows, lane + SUM_Z * lanes, 0.0)
    series[window, SERIES_TIME] = time
    series[window, SERIES_ENERGY] = energy
    series[window, SERIES_Z] = z


@njit(inline="always")
def step(
    active,
    alive,
    tables,
    history,
    work,
    window_time,
    field,
    alpha,
    measuring,
    lanes,
    lags,
    gases,
    thermal,
    upkeep,
    angular,
    tilted,
):
    """One flight and event of every active electron. Returns (active, alive); alive = -1 if no lane is spare."""
    rows = work.rows
    fly(active, tables, field, rows, lanes, gases, thermal, angular)
    if measuring:
        if tilted:
            tilt_scores(active, alpha, rows, lanes)
        record(active, rows, work.histogram, work.lab_histogram, work.recoil, work.counts, lanes, thermal)
    born_from = alive
    rare = list_rare(active, rows, work.rare, lanes)
    alive = collide(rare, alive, tables, history, work, window_time, measuring, lanes, lags, angular)
    if upkeep == SPLIT and alive >= 0:
        alive = split_and_roulette(active, alive, tables, history, work, window_time, lanes, lags)
    ended = list_ended(active, rows, work.ended, lanes)
    fields = COUPLED_FIELDS if upkeep == COUPLED else ELECTRON_FIELDS
    for child in range(born_from, alive):
        if upkeep == COUPLED:
            begin_streams(child, work.population[1], rows, lanes)
        swap_electrons(rows, child, active, lanes, fields)
        active += 1
    if alive < 0:
        return active, alive
    return retire(work.ended, ended, active, alive, rows, lanes, fields)


@njit(forceinline=True)
def end_window(alive, tables, history, extended, work, window_time, lanes, lags):
    """Settle all paths, lengthen the histories and take the sums over the population at the end of a window."""
    rows, lag_sums, point_sums, net_frequency = work.rows, work.lag_sums, work.point_sums, tables.net_frequency
    for lane in range(alive):
        score_path(lane, 1.0, window_time, rows, history, lag_sums, point_sums, lanes, lags)
        extend_history(lane, rows, history, extended, lanes, lags)
        score_window_end(lane, net_frequency, rows, extended, lag_sums, point_sums, lanes, lags)


@njit(inline="always")
def windows(
    tables,
    work,
    series,
    size,
    lags,
    window_time,
    field,
    alpha,
    measuring,
    max_steps,
    lanes,
    gases,
    thermal,
    upkeep,
    angular,
    tilted,
):
    """Run as many windows as `series` has rows; returns the status.

    tables : Tables; work : Workspace, changed in place; series : (windows, SERIES_COLUMNS), overwritten.
    size : electrons at the start of every window, or their summed weight over `past_growth`; lags : windows in a
    displacement history; window_time and field in kernel units; alpha : of the weight exp(-alpha z), if tilted;
    measuring : whether histograms and counts are taken (the path and lag sums always are); max_steps : bound on the
    steps of one window; lanes, gases, thermal, upkeep, angular, tilted : compile-time constants.
    After an odd number of windows the histories stand in `work.other_history`.
    """
    history, extended = work.history, work.other_history
    for window in range(series.shape[0]):
        alive = work.population[0]
        for lane in range(alive):
            store(work.rows, lane + LEFT * lanes, window_time)
        if upkeep == COUPLED:
            for lane in range(alive):
                begin_streams(lane, work.population[1], work.rows, lanes)
        active, steps = alive, 0
        path_before = work.point_sums[PATH]
        while active > 0:
            active, alive = step(
                active,
                alive,
                tables,
                history,
                work,
                window_time,
                field,
                alpha,
                measuring,
                lanes,
                lags,
                gases,
                thermal,
                upkeep,
                angular,
                tilted,
            )
            steps += 1
            if alive < 0:
                return FULL
            if steps > max_steps:
                return STUCK
        end_window(alive, tables, history, extended, work, window_time, lanes, lags)
        add_lane_sums(work.rows, lanes, series, window)
        series[window, SERIES_PATH] = work.point_sums[PATH] - path_before
        series[window, SERIES_ALIVE] = alive
        if alive == 0:
            return EXTINCT
        if tilted:
            tilt_weights(alive, alpha, work.rows, lanes)
        total = total_weight(alive, work.rows, lanes)
        weight = past_growth(total, size, work.population[1], work.growth, lags)
        work.population[1] += 1
        if work.population[1] % lags == 0:
            count_families(alive, work.rows, work.families, work.point_sums, lanes)
            found_families(alive, work.rows, lanes)
        if upkeep == SPLIT:
            renormalise(alive, size * weight / total, work.rows, lanes)
        elif upkeep == COUPLED:
            alive = resample(alive, size, weight, work.population[1], work.rows, work.combed, lanes)
        else:
            comb(alive, size, total, weight, work.rows, work.combed, lanes)
            alive = size
        work.population[0] = alive
        history, extended = extended, history
    return RUNNING


@cache
def compiled_windows(lanes: int, gases: int, thermal: bool, upkeep: int, angular: bool, tilted: bool):
    """The entry kernel for its compile-time constants; takes the arguments of `windows` less the last six."""
    digest = kernel_digest()

    def run_windows(tables, work, series, size, lags, window_time, field, alpha, measuring, max_steps):
        digest  # noqa: B018 - part of the cache key
        prefer_wide_vectors()
        return windows(
            tables,
            work,
            series,
            size,
            lags,
            window_time,
            field,
            alpha,
            measuring,
            max_steps,
            lanes,
            gases,
            thermal,
            upkeep,
            angular,
            tilted,
        )

    return compiled(run_windows)
