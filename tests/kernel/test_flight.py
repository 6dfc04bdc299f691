"""Free flight: paths and times between collisions against their exact laws, in spite of majorants and cut flights."""

from math import erf, exp, pi, sqrt

import numpy as np
import pytest
from numba import njit
from scipy import stats

from kernel.model_gases import HELIUM_U, constant_frequency, model, model_gas, power_law
from swarmgauge.gas import Mixture, load_named
from swarmgauge.gas.constants import SPEED_1_EV
from swarmgauge.kernel.bits import load, load_int, store
from swarmgauge.kernel.flight import fly
from swarmgauge.kernel.lanes import CUT, LEFT, NULL, OUTCOME, ROWS, SUM_ENERGY, SUM_TIME, SUM_Z, VX, VZ, WEIGHT, X, Z
from swarmgauge.kernel.start import launch
from swarmgauge.kernel.streams import cohort_start
from swarmgauge.swarm.curves import process_curves
from swarmgauge.swarm.tables import TOWNSEND_IN_KERNEL_UNITS, build_tables

LEAST_P = 1e-4
LANES = 2000
BEAMS = 500  # repeats of LANES electrons


@njit
def first_collisions(tables, field, rows, lanes, gases, thermal, most_steps, paths, times, cuts):
    """Fly every lane to its first real collision; fills path along z and time until then, and counts cut flights."""
    waiting = np.ones(lanes, dtype=np.bool_)
    left = lanes
    for _ in range(most_steps):
        before = rows[LEFT * lanes : (LEFT + 1) * lanes].copy()
        fly(lanes, tables, field, rows, lanes, gases, thermal, False)
        for lane in range(lanes):
            if not waiting[lane]:
                continue
            times[lane] += before[lane] - load(rows, lane + LEFT * lanes)
            outcome = load_int(rows, lane + OUTCOME * lanes)
            if outcome == CUT:
                cuts[0] += 1
            elif outcome != NULL:
                waiting[lane] = False
                paths[lane] = load(rows, lane + Z * lanes)
                left -= 1
        if left == 0:
            return True
    return False


def beam(mixture, E_over_N_Td, energy_eV, seed, window_scale=1.0, beams=BEAMS):
    """Path and time to the first collision of electrons that start along z, and cut flights per electron."""
    curves = process_curves(mixture, passive=False)
    field = TOWNSEND_IN_KERNEL_UNITS * E_over_N_Td
    tables = build_tables(mixture, curves, field, window_scale)
    paths, times = np.zeros((beams, LANES)), np.zeros((beams, LANES))
    cuts = np.zeros(1)
    for number in range(beams):
        rows = np.zeros(ROWS * LANES)
        launch(rows, cohort_start(seed, "beam", number), 0, LANES, np.array([0.0, 1.0]), np.array([0.0, 1.0]))
        view = rows.reshape(ROWS, LANES)
        view[VZ], view[WEIGHT], view[LEFT] = energy_eV**0.5, 1.0, 1e6
        arguments = (tables, field, rows, LANES, len(mixture.gases), mixture.temperature_K > 0)
        assert first_collisions(*arguments, 10_000, paths[number], times[number], cuts)
    return paths.ravel(), times.ravel(), cuts[0] / paths.size


def optical_depth(mixture, energies_eV):
    """Integral of the total cross section over energy from 0, 1e-20 m2 eV, on a fine grid of the energies given."""
    total = np.zeros(len(energies_eV))
    for gas, share in zip(mixture.gases, mixture.fractions, strict=True):
        for process in mixture.acting(gas):
            total += share * process.cross_section(energies_eV) / 1e-20
    return np.concatenate([[0.0], np.cumsum(0.5 * (total[1:] + total[:-1]) * np.diff(energies_eV))])


def test_attenuation_of_a_beam_without_field(seed):
    # Free paths are exponential with mean 1 / (N sigma); sigma of 6e-20 m2 makes 1/6 in units of 1 / (N 1e-20 m2).
    mixture = model(HELIUM_U, power_law("elastic", 4e-20), power_law("excitation", 2e-20, threshold_eV=1.0))
    paths, times, cut = beam(mixture, 0.0, 7.3, seed)
    count = paths.size
    assert cut == 0.0
    assert paths.mean() == pytest.approx(1 / 6, rel=3 / count**0.5)  # standard error 0.1 %
    assert stats.kstest(6 * paths, "expon").pvalue > LEAST_P
    np.testing.assert_allclose(paths, 7.3**0.5 * times, rtol=1e-9, atol=1e-8)  # times are differences from 1e6
    for depth in (0.1, 1.0, 3.0, 7.0):
        survived = np.count_nonzero(6 * paths > depth)
        expected = count * np.exp(-depth)
        assert abs(survived - expected) < 3.5 * (expected * (1 - np.exp(-depth))) ** 0.5


@pytest.mark.parametrize("window_scale", [1.0, 0.05])
@pytest.mark.parametrize("field", [1.0, 1000.0])
def test_times_are_exponential_where_the_frequency_is_constant(seed, field, window_scale):
    mixture = model(HELIUM_U, constant_frequency("elastic", 1e-13))
    _, times, cut = beam(mixture, field, 0.01, seed, window_scale)
    frequency = 1e-13 / (1e-20 * SPEED_1_EV)
    assert times.mean() * frequency == pytest.approx(1.0, rel=3 / times.size**0.5)
    assert stats.kstest(frequency * times, "expon").pvalue > LEAST_P
    assert cut > (1.0 if field > 10 and window_scale < 1 else -1.0)


@pytest.mark.parametrize("window_scale", [1.0, 0.01, 300.0])
@pytest.mark.parametrize(
    ("fractions", "field", "energy"),
    [
        ({"model-ramp": 1.0}, 24.0, 0.05),
        ({"argon-yamabe1983": 1.0}, 300.0, 0.1),
        ({"nitrogen-schmalzried2023": 0.8, "oxygen-lawton1978": 0.2}, 500.0, 0.02),
    ],
    ids=["ramp", "argon", "air"],
)
def test_attenuation_of_an_accelerated_beam(seed, fractions, field, energy, window_scale):
    """Along z energy grows as e0 + (E/N) z, so that the optical depth int N sigma dz = int sigma de / (E/N) is exact.

    The depth of the first collision must be exponential with mean 1 whatever resonances, thresholds and minima lie on
    the way: the law that local majorants, cut flights and null collisions have to keep.
    """
    leave_out = [f"{name}/{p.id}" for name in fractions for p in load_named(name).processes if p.third_body is not None]
    mixture = Mixture(fractions, leave_out=leave_out)
    paths, _, cut = beam(mixture, field, energy, seed, window_scale, beams=200)
    per_length = 2 * TOWNSEND_IN_KERNEL_UNITS * field
    reached = energy + per_length * paths
    grid = np.unique(np.concatenate([np.geomspace(1e-4, 2 * reached.max(), 300_000), np.linspace(0, 30, 100_001)]))
    depth = optical_depth(mixture, grid)
    depths = (np.interp(reached, grid, depth) - np.interp(energy, grid, depth)) / per_length
    count = depths.size
    assert cut > (0.2 if window_scale <= 1.0 else -1.0)  # flights are cut often: otherwise this would prove little
    assert depths.mean() == pytest.approx(1.0, rel=3.5 / count**0.5)  # standard error 0.16 %
    assert stats.kstest(depths, "expon").pvalue > LEAST_P


def test_integrals_of_a_flight(seed):
    # With constant acceleration a over time t from z = 0: z = v t + a t^2/2, int w^2 dt and int z dt likewise exact.
    mixture = model(HELIUM_U, power_law("elastic", 1e-40))
    tables = build_tables(mixture, process_curves(mixture, passive=False), 2.0)
    lanes = 8
    rows = np.zeros(ROWS * lanes)
    launch(rows, cohort_start(seed, "integrals", 0), 0, lanes, np.array([0.0, 1.0]), np.array([0.0, 1.0]))
    view = rows.reshape(ROWS, lanes)
    v, weight, length = np.array([0.7, -0.3, -1.1]), 0.25, 1.5
    view[VX : VZ + 1], view[WEIGHT], view[LEFT] = v[:, None], weight, length
    for _ in range(2000):
        one_flight(tables, 2.0, rows, lanes)
    assert (view[LEFT] == 0.0).all()
    way = v * length + np.array([0.0, 0.0, 0.5 * 2.0 * length**2])
    np.testing.assert_allclose(view[X : Z + 1], way[:, None] * np.ones(lanes), rtol=1e-12)
    np.testing.assert_allclose(view[SUM_TIME], weight * length, rtol=1e-12)
    energy = v @ v * length + v[2] * 2.0 * length**2 + 2.0**2 * length**3 / 3
    np.testing.assert_allclose(view[SUM_ENERGY], weight * energy, rtol=1e-12)
    path = v[2] * length**2 / 2 + 2.0 * length**3 / 6
    np.testing.assert_allclose(view[SUM_Z], weight * path, rtol=1e-11)
    np.testing.assert_allclose(view[VZ], v[2] + 2.0 * length, rtol=1e-12)


@njit
def one_flight(tables, field, rows, lanes):
    fly(lanes, tables, field, rows, lanes, 1, False, False)


@njit
def collision_counts(tables, speed, rows, lanes, gases, repeats, outcomes, total_time):
    """Outcomes and total time of flights that all start with `speed` along x in a warm gas without field."""
    for _ in range(repeats):
        for lane in range(lanes):
            store(rows, lane + VX * lanes, speed)
            store(rows, lane + (VX + 1) * lanes, 0.0)
            store(rows, lane + VZ * lanes, 0.0)
            store(rows, lane + LEFT * lanes, 1e9)
        fly(lanes, tables, 0.0, rows, lanes, gases, True, False)
        for lane in range(lanes):
            outcomes[load_int(rows, lane + OUTCOME * lanes)] += 1
    total_time[0] = rows[SUM_TIME * lanes : (SUM_TIME + 1) * lanes].sum()


def test_collision_frequency_in_a_warm_gas(seed):
    """Hard spheres of the electron's mass: the frequency at speed w is sigma <|w - u|> over the Maxwellian.

    <|w - u|> = s sqrt(2/pi) exp(-x^2) + (w + s^2/w) erf(x) with x = w / (s sqrt(2)), s the width of a component of u
    (S. Chapman and T. G. Cowling, The Mathematical Theory of Non-uniform Gases, 3rd ed. 1970, section 5.4).
    """
    gas = model_gas(5.4857990907e-4, power_law("elastic", 6e-20))
    temperature_eV = 1.0
    mixture = Mixture({gas: 1.0}, temperature_K=temperature_eV * 11604.518)
    tables = build_tables(mixture, process_curves(mixture, passive=False), 0.0)
    s, w = sqrt(temperature_eV / 2.0), 0.8
    x = w / (s * sqrt(2.0))
    exact = 6.0 * (s * sqrt(2 / pi) * exp(-x * x) + (w + s * s / w) * erf(x))
    rows = np.zeros(ROWS * LANES)
    launch(rows, cohort_start(seed, "warm", 0), 0, LANES, np.array([0.0, 1.0]), np.array([0.0, 1.0]))
    rows.reshape(ROWS, LANES)[WEIGHT] = 1.0
    outcomes, total_time = np.zeros(4, dtype=np.int64), np.zeros(1)
    collision_counts(tables, w, rows, LANES, 1, 1000, outcomes, total_time)
    elastic = outcomes[2]
    assert outcomes[CUT] == outcomes[3] == 0
    assert elastic > 100_000
    assert elastic / total_time[0] == pytest.approx(exact, rel=3 * (1 / elastic) ** 0.5)
