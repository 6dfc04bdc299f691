"""Directions after collisions: the laws as the kernel draws them, and single collisions with them."""

import math

import numpy as np
import pytest
from numba import njit
from scipy import integrate

from kernel.model_gases import HELIUM_U, model, power_law
from kernel.test_collide import LANES, built, event, many_shares, seeded_rows
from swarmgauge.gas import AngleTable, Forward, Gas, Isotropic, Mixture, Screened
from swarmgauge.gas.sharing import Sharing
from swarmgauge.kernel.flight import deflected
from swarmgauge.kernel.lanes import VX, VZ
from swarmgauge.kernel.lookup import (
    PARTS,
    SHARE_DENSITY,
    angle_row,
    angle_row_edges,
    drawn_cosine,
    energy_cell_edges,
    speed_cell,
    speed_edges,
)
from swarmgauge.kernel.streams import one_to_two, splitmix_words, upper_one_to_two

DRAWS = 1_000_000


@njit
def cosines(angles, law, speed, words, result):
    cell, fraction = speed_cell(speed)
    row, place = angle_row(cell, fraction)
    for i in range(words.size):
        result[i] = drawn_cosine(angles, law, row, place, upper_one_to_two(words[i]))


@njit
def turned(e, cosine, words, result):
    for i in range(words.size):
        azimuth = 2.0 * math.pi * one_to_two(words[i])
        result[i] = deflected(e[0], e[1], e[2], cosine, math.cos(azimuth), math.sin(azimuth))


def drawn(law, energy, seed):
    """Cosines that the kernel draws of a law at an energy; the law stands behind the isotropic one, as in a mixture."""
    rows = angle_row_edges() ** 2
    angles = np.stack([Isotropic().parts(rows, PARTS), law.parts(rows, PARTS)]).ravel()
    result = np.empty(DRAWS)
    cosines(angles, 1, math.sqrt(energy), splitmix_words(seed, DRAWS), result)
    return result


def quadrature(density, points=None):
    """<cos> and <cos^2> of a density of cos, by scipy."""
    whole, first, second = (
        integrate.quad(lambda c, power=power: c**power * density(c), -1, 1, points=points, limit=200)[0]
        for power in (0, 1, 2)
    )
    return first / whole, second / whole


def screened(xi):
    return lambda c: 1.0 / (1.0 - xi * c) ** 2


RISING = ([0.1, 1.0, 30.0], [0.0, 0.2, 0.9])  # forward with energy, as cross sections of long range
LAWS = {
    "isotropic": (Isotropic(), lambda energy: lambda c: 1.0),
    "forward": (Screened([0.0], [0.95]), lambda energy: screened(0.95)),
    "backward": (Screened([0.0], [-0.6]), lambda energy: screened(-0.6)),
    "energy": (Screened(*RISING), lambda energy: screened(np.interp(energy, *RISING))),
    "table": (
        AngleTable([0.0, 60.0, 180.0], [1.0, 9.0], [[1.0, 1.0, 1.0], [6.0, 1.0, 2.0]]),
        lambda energy: lambda c: mixed(energy, math.degrees(math.acos(c))),
    ),
}  # fmt: skip


def mixed(energy, angle):
    """The table above, its shapes normalised (the flat one to 2, the other by scipy) and linear in energy."""
    share = np.clip((energy - 1.0) / 8.0, 0.0, 1.0)
    return (1.0 - share) / 2.0 + share * np.interp(angle, [0.0, 60.0, 180.0], [6.0, 1.0, 2.0]) / SECOND_SHAPE


SECOND_SHAPE = integrate.quad(
    lambda t: np.interp(t, [0.0, 60.0, 180.0], [6.0, 1.0, 2.0]) * math.sin(math.radians(t)) * math.pi / 180.0,
    0.0,
    180.0,
    points=[60.0],
)[0]


@pytest.mark.parametrize("name", LAWS)
@pytest.mark.parametrize("energy", [0.3, 5.0, 47.0])
def test_drawn_moments(seed, name, energy):
    # 1e-3 is the table's accuracy; a million draws have standard errors below 7e-4.
    law, density = LAWS[name]
    sample = drawn(law, energy, seed)
    assert np.abs(sample).max() <= 1.0
    for power, exact in zip((1, 2), quadrature(density(energy)), strict=True):
        values = sample**power
        error = values.std() / math.sqrt(DRAWS)
        assert error < 7e-4
        assert abs(values.mean() - exact) < 3.5 * error + 1e-3


@pytest.mark.parametrize("name", LAWS)
def test_mean_cosines_between_the_rows_of_the_tables(name):
    # What the kernel draws on average is linear in speed between rows, 4 % in energy apart: where a law bends sharply
    # it is cut there, by less than 1 %; elsewhere it is met.
    law, _ = LAWS[name]
    edges = angle_row_edges()
    speed = np.sqrt(np.geomspace(1e-3, 1e4, 4000))
    rows = np.interp(speed, edges, law.parts(edges**2, PARTS).mean(axis=(1, 2)))
    off = np.abs(rows - law.mean_cosine(speed**2))
    assert off.max() < 1e-2
    assert (off > 1e-3).mean() < 3e-3
    assert off.mean() < 5e-5


def test_rows_lie_at_edges_of_speed_cells():
    edges = angle_row_edges()
    for speed in (0.0, 1e-4, 0.3, 1.7, 50.0):
        row, place = angle_row(*speed_cell(speed))
        assert 0.0 <= place < 1.0
        assert edges[row] + place * (edges[row + 1] - edges[row]) == pytest.approx(speed, abs=1e-12)
    assert len(edges) == (len(speed_edges()) - 1) // 16 + 1


@pytest.mark.parametrize("axis", [(0.0, 0.0, 1.0), (0.0, 0.0, -1.0), (0.6, 0.0, -0.8), (0.48, -0.6, 0.64)])
@pytest.mark.parametrize("cosine", [1.0, 0.3, -0.9, -1.0])
def test_turning_by_an_angle(seed, axis, cosine):
    e = np.array(axis)
    n = np.empty((20000, 3))
    turned(e, cosine, splitmix_words(seed, len(n)), n)
    np.testing.assert_allclose(np.linalg.norm(n, axis=1), 1.0, rtol=1e-12)
    np.testing.assert_allclose(n @ e, cosine, rtol=0, atol=1e-12)
    across = n - cosine * e
    radius = math.sqrt(1.0 - cosine**2)
    error = radius / math.sqrt(2 * len(n))
    np.testing.assert_allclose(across.mean(axis=0), 0.0, atol=4.0 * error + 1e-12)
    if radius > 0.0:  # evenly round the axis: the spread is the same along any direction across
        spread = np.cov(across.T)
        np.testing.assert_allclose(spread, 0.5 * radius**2 * (np.eye(3) - np.outer(e, e)), atol=0.03 * radius**2)


def ionizing(**options):
    return model(
        HELIUM_U,
        power_law("elastic", 1e-20),
        power_law("ionization", 1e-20, threshold_eV=24.6, **options),
    )


VELOCITY, NEUTRAL = (8.0, 2.0, -3.0), (0.003, -0.002, 0.001)


def left(uniform, azimuth):
    """What the flight pass leaves for the rare pass: a number in [1, 2) and the azimuth."""
    return 1.0 + uniform, math.cos(azimuth), math.sin(azimuth)


@pytest.mark.parametrize("law", [Screened([0.0], [0.8]), Forward()])
def test_excitation_keeps_energy_and_momentum_whatever_its_law(seed, law):
    mixture = model(
        HELIUM_U, power_law("elastic", 1e-20), power_law("excitation", 1e-20, threshold_eV=3.0, scattering=law)
    )
    ratio = mixture.gases[0].mass_ratio
    g = np.subtract(VELOCITY, NEUTRAL)
    for uniform in (0.0, 0.4, 0.999):
        _, view, alive = event(built(mixture), VELOCITY, NEUTRAL, seed, left(uniform, 2.0), angular=True)
        assert alive == 1
        after = view[VX : VZ + 1, 0]
        recoiled = np.array(NEUTRAL) + ratio * (np.array(VELOCITY) - after)
        new = after - recoiled
        assert new @ new == pytest.approx(g @ g - 3.0 * (1.0 + ratio), rel=1e-12)
        cosine = new @ g / math.sqrt((new @ new) * (g @ g))
        if isinstance(law, Forward):
            assert cosine == pytest.approx(1.0, abs=1e-12)
        else:  # the published sampling with r = 1 for backward: the kernel's number rises with cos chi
            r = 1.0 - uniform
            assert cosine == pytest.approx(1.0 - 2.0 * r * 0.2 / (1.0 + 0.8 * (1.0 - 2.0 * r)), abs=0.1)


@pytest.mark.parametrize("sharing", [Sharing("equal"), Sharing("fixed", 0.2), Sharing("width", width_eV=15.8)])
def test_binary_ejecta_keep_energy_and_momentum_as_free_electrons(seed, sharing):
    # Two equal masses, one at rest before, share the energy left: they part at right angles and the sum of their
    # velocities is that of one electron with the energy left, along g (mechanics).
    mixture = ionizing(sharing=sharing, ejecta="binary")
    ratio = mixture.gases[0].mass_ratio
    _, view, alive = event(built(mixture), VELOCITY, NEUTRAL, seed, left(0.3, 1.1), angular=True)
    assert alive == 2
    electron, neutral = ratio / (1.0 + ratio), 1.0 / (1.0 + ratio)
    centre = electron * np.array(VELOCITY) + neutral * np.array(NEUTRAL)
    first, second = ((view[VX : VZ + 1, lane] - centre) / neutral for lane in (0, 1))
    g = np.subtract(VELOCITY, NEUTRAL)
    available = g @ g - 24.6 * (1.0 + ratio)
    assert first @ first + second @ second == pytest.approx(available, rel=1e-12)
    assert first @ second == pytest.approx(0.0, abs=1e-10)
    np.testing.assert_allclose(first + second, math.sqrt(available / (g @ g)) * g, rtol=0, atol=1e-10)


@pytest.mark.parametrize("available", [3.0, 15.4, 475.0])
def test_published_width_of_ejected_energies(seed, available):
    # C. B. Opal, W. K. Peterson, E. C. Beaty, J. Chem. Phys. 55, 4100 (1971): density 1 / (1 + (energy/width)^2.1) up
    # to half of what is left; helium 15.8 eV, from memory. Mean by scipy; median: half of the integral lies below it.
    def density(e):
        return 1.0 / (1.0 + (e / 15.8) ** 2.1)

    edges = energy_cell_edges()
    table = Sharing("width", width_eV=15.8).cumulated(edges)
    sample = many_shares(SHARE_DENSITY, 0.5, seeded_rows(seed), DRAWS, LANES, available, table, edges)
    assert sample.max() <= 0.5 * available
    whole = integrate.quad(density, 0.0, 0.5 * available)[0]
    mean = integrate.quad(lambda e: e * density(e), 0.0, 0.5 * available)[0] / whole
    error = sample.std() / math.sqrt(DRAWS)
    assert error < 2e-3 * mean
    assert abs(sample.mean() - mean) < 3.5 * error + 1e-4 * mean
    below = integrate.quad(density, 0.0, np.median(sample))[0] / whole
    assert below == pytest.approx(0.5, abs=3.5 * 0.5 / math.sqrt(DRAWS))


def test_tabulated_ejected_energies(seed):
    # Density 1 - e/20 up to half of 30 eV: mean (15^2/2 - 15^3/60)/(15 - 15^2/40), median by the quadratic; by hand.
    edges = energy_cell_edges()
    table = Sharing("table", ejected_eV=[0.0, 20.0], density=[1.0, 0.0]).cumulated(edges)
    sample = many_shares(SHARE_DENSITY, 0.5, seeded_rows(seed), DRAWS, LANES, 30.0, table, edges)
    whole = 15.0 - 15.0**2 / 40.0
    mean = (15.0**2 / 2.0 - 15.0**3 / 60.0) / whole
    median = 20.0 - math.sqrt(400.0 - 20.0 * whole)
    error = sample.std() / math.sqrt(DRAWS)
    assert abs(sample.mean() - mean) < 3.5 * error + 1e-4 * mean
    assert np.median(sample) == pytest.approx(median, rel=5e-3)


def test_two_processes_find_their_own_densities():
    mixture = model(
        HELIUM_U,
        power_law("elastic", 1e-20),
        power_law("ionization", 1e-20, threshold_eV=24.6, name="a", sharing=Sharing("width", width_eV=15.8)),
        power_law("ionization", 1e-20, threshold_eV=30.0, name="b", sharing=Sharing("equal")),
        power_law("ionization", 1e-20, threshold_eV=40.0, name="c", sharing=Sharing("width", width_eV=0.1)),
    )
    tables = built(mixture)
    edges = energy_cell_edges()
    assert tables.ejected_at.tolist() == [0, 0, len(edges)]
    np.testing.assert_array_equal(tables.ejected.reshape(2, -1)[1], Sharing("width", width_eV=0.1).cumulated(edges))


def test_an_elastic_law_with_nothing_else_is_enough():
    gas = Gas("m", "X", HELIUM_U, "integral", (power_law("elastic", 1e-20, scattering=Screened([0.0], [0.5])),))
    tables = built(Mixture({gas: 1.0}))
    assert tables.elastic_law.tolist() == [1]
    assert tables.scattering_law.size == 0
