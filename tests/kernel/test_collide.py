"""Laws of one collision: conservation, energy loss and sharing, and the moves between lanes and in the comb."""

import numpy as np
import pytest
from numba import njit

from kernel.model_gases import HELIUM_U, constant_frequency, model, model_gas, power_law
from swarmgauge.gas import Mixture
from swarmgauge.gas.process import Sharing
from swarmgauge.kernel.cohort import comb, new_workspace
from swarmgauge.kernel.collide import collide, retire, select_process, shared_energy, swap_electrons
from swarmgauge.kernel.flight import isotropic_direction, scattered
from swarmgauge.kernel.history import PATH
from swarmgauge.kernel.lanes import (
    ELECTRON_FIELDS,
    FRACTION,
    GAS_CELL,
    LEFT,
    NX,
    REMAINDER,
    ROWS,
    SLOT,
    UX,
    VX,
    VZ,
    WEIGHT,
    Z,
)
from swarmgauge.kernel.lookup import (
    SHARE_EQUAL,
    SHARE_FIXED,
    SHARE_UNIFORM,
    SPEED_CELLS,
    speed_cell,
    speed_edges,
)
from swarmgauge.kernel.start import launch
from swarmgauge.kernel.streams import cohort_start
from swarmgauge.swarm.curves import process_curves, process_threshold
from swarmgauge.swarm.tables import build_tables

LANES = 64
NONE = np.zeros(1)


def seeded_rows(seed, lanes=LANES):
    """A lane array with streams, no electrons."""
    rows = np.zeros(ROWS * lanes)
    launch(rows, cohort_start(seed, "collide", 0), 0, lanes, np.array([0.0, 1.0]), np.array([0.0, 1.0]))
    return rows


def built(mixture):
    return build_tables(mixture, process_curves(mixture, passive=False), 0.0)


@pytest.mark.parametrize("mass_ratio", [1.0, 0.01, 1e-5])
def test_two_body_scattering_conserves_momentum_and_energy(mass_ratio):
    # m = 1, M = 1 / ratio: the neutral's velocity follows from momentum; the energies must then agree by themselves.
    rng = np.random.default_rng(3)
    m, M = 1.0, 1.0 / mass_ratio
    for _ in range(50):
        v, u = rng.normal(size=3), rng.normal(size=3) * mass_ratio**0.5
        g = np.linalg.norm(v - u)
        n = np.array(isotropic_direction(np.uint64(rng.integers(2**63))))
        after = np.array(scattered(*v, *u, g, *n, m / (m + M), M / (m + M)))
        neutral = u + m / M * (v - after)
        np.testing.assert_allclose(np.linalg.norm(after - neutral), g, rtol=1e-11)
        before = m * v @ v + M * u @ u
        np.testing.assert_allclose(m * after @ after + M * neutral @ neutral, before, rtol=1e-11)
        np.testing.assert_allclose((after - neutral) / g, n, rtol=0, atol=1e-10)  # n is the new relative direction


def event(tables, velocity, neutral, seed, direction=(0.6, 0.0, 0.8), angular=False):
    """Workspace, its rows and the number alive after an event of the only process by the electron in lane 0.

    direction : after the collision; with angular laws, what stands in its place (see `lanes`).
    """
    lags = 2
    work = new_workspace(LANES, lags, 1, 1)
    work.rows[:] = seeded_rows(seed)
    view = work.rows.reshape(ROWS, LANES)
    cell, fraction = speed_cell(float(np.linalg.norm(np.subtract(velocity, neutral))))
    view[VX : VZ + 1, 0] = velocity
    view[UX : UX + 3, 0] = neutral
    view[NX : NX + 3, 0] = direction
    view[WEIGHT, 0], view[LEFT, 0], view[Z, 0], view[SLOT, 0] = 1.0, 2.5, 0.75, 9.0
    view[FRACTION, 0] = fraction
    view.view(np.int64)[GAS_CELL, 0] = cell
    low, high = tables.process.reshape(SPEED_CELLS, 2)[cell]
    view[REMAINDER, 0] = 0.5 * (low + fraction * (high - low))
    work.rare[0] = 0
    alive = collide(1, 1, tables, work.history, work, 4.0, True, LANES, lags, angular)
    assert work.events.tolist() == [1, 0]
    return work, view, alive


def energy_in_centre_of_mass(ratio, velocity, neutral):
    """eV; with w^2 the kinetic energy of the electron: g^2 M / (m + M)."""
    return float(np.sum(np.subtract(velocity, neutral) ** 2)) / (1.0 + ratio)


@pytest.mark.parametrize("molar_mass", [HELIUM_U, 5.4857990907e-4, 0.054858])
@pytest.mark.parametrize("neutral", [(0.0, 0.0, 0.0), (0.3, -0.2, 0.1)])
def test_excitation_loses_the_threshold_in_the_centre_of_mass(seed, molar_mass, neutral):
    mixture = model(
        molar_mass, power_law("elastic", 1e-20), power_law("excitation", 1e-20, threshold_eV=3.0), temperature_K=0.0
    )
    ratio = mixture.gases[0].mass_ratio
    velocity = (2.5, 0.4, -1.5)
    _, view, alive = event(built(mixture), velocity, neutral, seed)
    assert alive == 1
    after = view[VX : VZ + 1, 0]
    recoiled = np.array(neutral) + ratio * (np.array(velocity) - after)
    before = energy_in_centre_of_mass(ratio, velocity, neutral)
    assert energy_in_centre_of_mass(ratio, after, recoiled) == pytest.approx(before - 3.0, rel=1e-12)
    assert view[LEFT, 0] == 2.5


@pytest.mark.parametrize(
    ("sharing", "shares"), [("equal", (0.5, 0.5)), ("fixed", (0.8, 0.2)), ("uniform", None)], ids=str
)
@pytest.mark.parametrize("neutral", [(0.0, 0.0, 0.0), (0.3, -0.2, 0.1)])
def test_ionization_shares_the_energy_left(seed, sharing, shares, neutral):
    # In the centre of mass (the ion's share of order m/M left out, as `collide` says) both electrons have what was
    # there less the threshold.
    law = Sharing(sharing, 0.2) if sharing == "fixed" else Sharing(sharing)
    mixture = model(
        HELIUM_U, power_law("elastic", 1e-20), power_law("ionization", 1e-20, threshold_eV=3.0, sharing=law)
    )
    ratio = mixture.gases[0].mass_ratio
    velocity = (2.5, 0.4, -1.5)
    work, view, alive = event(built(mixture), velocity, neutral, seed)
    assert alive == 2
    assert work.point_sums[PATH] == -0.75  # the child's path begins here: what it copied is taken off
    centre = (np.array(velocity) * ratio + np.array(neutral)) / (1.0 + ratio)
    relative = [np.sum((view[VX : VZ + 1, lane] - centre) ** 2) * (1.0 + ratio) ** 2 for lane in (0, 1)]
    available = float(np.sum(np.subtract(velocity, neutral) ** 2)) - 3.0 * (1.0 + ratio)
    assert sum(relative) == pytest.approx(available, rel=1e-12)
    if shares:
        np.testing.assert_allclose(relative, np.array(shares) * available, rtol=1e-11)
    for field in (LEFT, WEIGHT, Z, SLOT):  # the child is born here and now, with its parent's past
        assert view[field, 1] == view[field, 0]
    directions = [
        (view[VX : VZ + 1, lane] - centre) / np.linalg.norm(view[VX : VZ + 1, lane] - centre) for lane in (0, 1)
    ]
    np.testing.assert_allclose(directions[0], (0.6, 0.0, 0.8), atol=1e-12)
    assert abs(directions[1] @ directions[0]) < 0.999


def test_ejected_electrons_leave_isotropically_with_any_part_of_the_energy(seed):
    mixture = model(HELIUM_U, power_law("elastic", 1e-20), power_law("ionization", 1e-20, threshold_eV=3.0))
    tables = built(mixture)
    velocity, available = (4.0, 0.0, 0.0), 16.0 - 3.0 * (1.0 + mixture.gases[0].mass_ratio)
    cosines, parts = [], []
    for number in range(3000):
        _, view, _ = event(tables, velocity, (0.0, 0.0, 0.0), 1000 * seed + number)
        child = view[VX : VZ + 1, 1]
        energy = float(child @ child)
        parts.append(energy / available)
        cosines.append(child[0] / energy**0.5)
    # Uniform on (0, 1) and on (-1, 1): means 1/2 and 0, variances 1/12 and 1/3 (with errors from the fourth moments).
    assert np.mean(parts) == pytest.approx(1 / 2, abs=4 * (1 / 12 / 3000) ** 0.5)
    assert np.var(parts) == pytest.approx(1 / 12, abs=4 * (1 / 180 / 3000) ** 0.5)
    assert np.mean(cosines) == pytest.approx(0.0, abs=4 * (1 / 3 / 3000) ** 0.5)
    assert np.var(cosines) == pytest.approx(1 / 3, abs=4 * (4 / 45 / 3000) ** 0.5)


@njit
def many_shares(law, fraction, rows, count, lanes, available=2.0, ejected=NONE, edges=NONE):
    result = np.empty(count)
    for i in range(count):
        result[i] = shared_energy(law, fraction, available, ejected, 0, edges, rows, 0, lanes)
    return result


def test_sharing_laws(seed):
    count = 1_000_000
    uniform = many_shares(SHARE_UNIFORM, 0.5, seeded_rows(seed), count, LANES)
    assert uniform.mean() == pytest.approx(1.0, abs=4 * (1 / 3 / count) ** 0.5)
    assert uniform.var() == pytest.approx(1 / 3, abs=4 * (4 / 45 / count) ** 0.5)
    assert (many_shares(SHARE_EQUAL, 0.3, seeded_rows(seed), 3, LANES) == 1.0).all()
    assert (many_shares(SHARE_FIXED, 0.3, seeded_rows(seed), 3, LANES) == 0.6).all()


def test_attachment_marks_the_electron(seed):
    mixture = model(HELIUM_U, power_law("elastic", 1e-20), power_law("attachment", 1e-20))
    work, view, alive = event(built(mixture), (1.0, 0.0, 0.0), (0.0, 0.0, 0.0), seed)
    assert alive == 1  # it is dropped with those whose window is over
    assert work.point_sums[PATH] == 0.75
    assert view[LEFT, 0] == -1.0
    assert view[VX, 0] == 1.0


@njit
def selections(process, at, first, last, fraction, remainders):
    result = np.empty(remainders.size, dtype=np.int64)
    for i in range(remainders.size):
        result[i] = select_process(process, at, first, last, fraction, remainders[i])
    return result


def test_a_process_is_selected_by_its_share():
    first = model_gas(
        HELIUM_U,
        power_law("elastic", 1e-20),
        power_law("excitation", 2e-20, 0.5, name="a", threshold_eV=1.0),
        power_law("excitation", 1e-20, name="b", threshold_eV=2.0),
        name="first",
    )
    second = model_gas(
        40.0,
        power_law("elastic", 1e-20),
        power_law("attachment", 3e-20, 0.5),
        power_law("ionization", 1e-20),
        name="second",
    )
    mixture = Mixture({first: 0.25, second: 0.75})
    tables = built(mixture)
    assert tables.first_process.tolist() == [0, 2, 4]
    speed = 1.7
    cell, fraction = speed_cell(speed)
    exact = [
        share * speed * gas.process(name).cross_section(np.array([speed**2]))[0] / 1e-20
        for gas, share, name in [
            (first, 0.25, "a"),
            (first, 0.25, "b"),
            (second, 0.75, "attachment"),
            (second, 0.75, "ionization"),
        ]
    ]
    for gas, processes in ((0, (0, 1)), (1, (2, 3))):
        total = exact[processes[0]] + exact[processes[1]]
        remainders = np.linspace(0.0, 1.1 * total, 100_001)
        found = selections(tables.process, 2 * 4 * cell, *tables.first_process[gas : gas + 2], fraction, remainders)
        step = remainders[1]
        assert np.count_nonzero(found == processes[0]) * step == pytest.approx(exact[processes[0]], rel=2e-4)
        assert np.count_nonzero(found == processes[1]) * step == pytest.approx(exact[processes[1]], rel=2e-4)
        assert (found[remainders > 1.001 * total] == -1).all()


def test_cells_below_a_threshold_are_off():
    # With a mass like the electron's the threshold in relative speed is twice the energy loss.
    for mass in (HELIUM_U, 5.4857990907e-4):
        gas = model_gas(mass, power_law("elastic", 1e-20), power_law("excitation", 1e-20, threshold_eV=2.0))
        tables = built(Mixture({gas: 1.0}))
        on = np.flatnonzero(tables.process.reshape(SPEED_CELLS, 1, 2).any(axis=(1, 2)))
        least = process_threshold(gas, gas.processes[1])
        assert least == pytest.approx(2.0 * (1 + gas.mass_ratio), rel=1e-12)
        assert speed_edges()[on[0]] ** 2 >= least
        assert speed_edges()[on[0] - 1] ** 2 < least


# Moves between lanes


def numbered_rows(lanes):
    """Electron i has i in all its fields but a positive time left."""
    rows = np.zeros((ROWS, lanes))
    rows[:] = np.arange(ROWS)[:, None] * 1000 + np.arange(lanes)
    return rows


def test_swap_moves_electrons_only():
    rows = numbered_rows(8)
    swap_electrons(rows.ravel(), 2, 5, 8, ELECTRON_FIELDS)
    before = numbered_rows(8)
    assert (rows[:ELECTRON_FIELDS, 2] == before[:ELECTRON_FIELDS, 5]).all()
    assert (rows[:ELECTRON_FIELDS, 5] == before[:ELECTRON_FIELDS, 2]).all()
    assert (rows[ELECTRON_FIELDS:] == before[ELECTRON_FIELDS:]).all()
    others = [0, 1, 3, 4, 6, 7]
    assert (rows[:, others] == before[:, others]).all()


@pytest.mark.parametrize("trial", range(20))
def test_retire_keeps_every_electron_in_its_place(trial):
    rng = np.random.default_rng(trial)
    lanes, active, alive = 40, 25, 33
    rows = numbered_rows(lanes)
    fate = rng.choice([1.0, 0.0, -1.0], size=active)  # flying on, window over, attached
    if trial == 0:
        fate[:] = -1.0
    rows[LEFT, :active] = fate
    rows[LEFT, active:alive] = 0.0
    ended = np.flatnonzero(fate <= 0.0)
    buffer = np.concatenate([ended, np.full(lanes + 1 - len(ended), -7)])
    new_active, new_alive = retire(buffer, len(ended), active, alive, rows.ravel(), lanes, ELECTRON_FIELDS)
    assert new_active == np.count_nonzero(fate > 0)
    assert new_alive == alive - np.count_nonzero(fate < 0)
    names = rows[SLOT] - 1000 * SLOT  # the lane in which each electron began
    assert set(names[:new_active]) == set(np.flatnonzero(fate > 0))
    over = set(np.flatnonzero(fate == 0)) | set(range(active, alive))
    assert set(names[new_active:new_alive]) == over


def combed(weights, size, seed):
    """Which of the electrons the comb took, by their lanes; and the rows."""
    lanes = max(len(weights), size) + 8
    rows = seeded_rows(seed, lanes)
    view = rows.reshape(ROWS, lanes)
    view[:ELECTRON_FIELDS] = np.arange(lanes)
    view[WEIGHT, : len(weights)] = weights
    comb(len(weights), size, float(np.sum(weights)), 1.0, rows, np.zeros(ELECTRON_FIELDS * lanes), lanes)
    return view[SLOT, :size].astype(int), view[:, :size]


def test_comb_takes_each_electron_weight_times_n_over_total_times(seed):
    weights = np.array([1.0, 0.25, 3.0, 1.0, 0.0, 2.5, 0.5, 1.0])
    size, trials = 5, 4000
    expected = weights * size / weights.sum()
    taken = np.zeros(len(weights))
    for trial in range(trials):
        lanes_taken, view = combed(weights, size, 10_000 * seed + trial)
        copies = np.bincount(lanes_taken, minlength=len(weights))
        # systematic: every number of copies is the whole number below or above what is expected
        assert (copies >= np.floor(expected - 1e-12)).all()
        assert (copies <= np.ceil(expected + 1e-12)).all()
        assert (np.diff(lanes_taken) >= 0).all()
        assert (view[WEIGHT] == 1.0).all()
        assert (view[Z] == 0.0).all()
        assert (view[VX] == lanes_taken).all()
        taken += copies
    part = expected % 1.0
    np.testing.assert_allclose(taken / trials, expected, rtol=0, atol=(4 * (part * (1 - part) / trials) ** 0.5).max())
    assert taken[4] == 0


@pytest.mark.parametrize(("alive", "size"), [(7, 7), (10, 7), (5, 7), (1, 7), (700, 500)])
def test_comb_of_equal_weights(seed, alive, size):
    lanes_taken, _ = combed(np.ones(alive), size, seed)
    copies = np.bincount(lanes_taken, minlength=alive)
    assert copies.sum() == size
    assert set(copies) <= {size // alive, -(-size // alive)}


def test_unused_gases_do_not_confuse_the_tables():
    # A gas without non-elastic processes before one with them.
    plain = model_gas(HELIUM_U, constant_frequency("elastic", 1e-13), name="a-plain")
    rich = model_gas(40.0, power_law("elastic", 1e-20), power_law("attachment", 1e-20), name="b-rich")
    tables = built(Mixture({plain: 0.5, rich: 0.5}))
    assert tables.first_process.tolist() == [0, 0, 1]
    assert tables.kind.tolist() == [2]
