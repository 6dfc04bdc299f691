"""The kernel's own functions and laws for one word: against numpy, scipy and exact moments."""

import numpy as np
import pytest
from numba import njit
from scipy import stats

from swarmgauge.kernel.flight import isotropic_direction, normal_pair
from swarmgauge.kernel.functions import exp, log, sincos_turn
from swarmgauge.kernel.streams import cohort_start, splitmix_words

LEAST_P = 1e-4


@njit
def logs(x):
    result = np.empty(x.size)
    for i in range(x.size):
        result[i] = log(x[i])
    return result


@njit
def exponentials(x):
    result = np.empty(x.size)
    for i in range(x.size):
        result[i] = exp(x[i])
    return result


@njit
def turns(fraction):
    result = np.empty((2, fraction.size))
    for i in range(fraction.size):
        result[0, i], result[1, i] = sincos_turn(fraction[i])
    return result


@njit
def directions(words):
    result = np.empty((3, words.size))
    for i in range(words.size):
        result[0, i], result[1, i], result[2, i] = isotropic_direction(words[i])
    return result


@njit
def normal_pairs(words):
    result = np.empty((2, words.size))
    for i in range(words.size):
        result[0, i], result[1, i] = normal_pair(words[i])
    return result


def random_words(seed, key, count):
    return splitmix_words(cohort_start(seed, key, 0), count)


def test_log():
    tiny_gap = 1.0 - 2.0 ** -np.arange(1.0, 53.0)
    x = np.concatenate([np.geomspace(1e-300, 1e300, 100_001), np.linspace(0.5, 2.0, 100_001), tiny_gap, [1.0]])
    exact = np.log(x)
    assert (abs(logs(x) - exact) <= 1e-12 * abs(exact)).all()
    assert log(1.0) == 0.0


def test_exp():
    x = np.concatenate([np.linspace(-690.0, 690.0, 100_001), np.linspace(-1.0, 1.0, 100_001), [0.0, -1e-300]])
    exact = np.exp(x)
    assert (abs(exponentials(x) - exact) <= 2e-13 * exact).all()
    assert exp(0.0) == 1.0
    assert exp(-1e6) == exp(-700.0) > 0.0


def test_sine_and_cosine():
    fraction = np.concatenate([np.linspace(1.0, 2.0, 200_001)[:-1], [2.0 - 2.0**-52, 1.25, 1.5, 1.75]])
    angle = 2.0 * np.pi * (fraction - 1.5)
    sine, cosine = turns(fraction)
    np.testing.assert_allclose(sine, np.sin(angle), rtol=0, atol=1e-12)
    np.testing.assert_allclose(cosine, np.cos(angle), rtol=0, atol=1e-12)
    np.testing.assert_allclose(sine**2 + cosine**2, 1.0, rtol=0, atol=1e-12)


def test_isotropic_directions(seed):
    n = directions(random_words(seed, "isotropic", 2_000_000))
    np.testing.assert_allclose((n**2).sum(axis=0), 1.0, rtol=0, atol=1e-12)
    count = n.shape[1]
    # Exact moments of the unit sphere: <n> = 0, <n_i n_j> = delta_ij / 3, <n_i^4> = 1/5, <n_i^2 n_j^2> = 1/15.
    assert (abs(n.mean(axis=1)) < 4 * (1 / 3 / count) ** 0.5).all()
    assert (abs((n**2).mean(axis=1) - 1 / 3) < 4 * (4 / 45 / count) ** 0.5).all()
    assert (abs((n**4).mean(axis=1) - 1 / 5) < 4 * (16 / 225 / count) ** 0.5).all()
    for i, j in ((0, 1), (0, 2), (1, 2)):
        assert abs((n[i] * n[j]).mean()) < 4 * (1 / 15 / count) ** 0.5
    for axis in n:
        assert stats.kstest(axis[:300_000], "uniform", args=(-1.0, 2.0)).pvalue > LEAST_P
    assert stats.kstest(np.arctan2(n[1], n[0])[:300_000], "uniform", args=(-np.pi, 2 * np.pi)).pvalue > LEAST_P


def test_isotropic_direction_of_extreme_words():
    for word in (0, 0xFFFFFFFFFFFFFFFF, 0xFFFFFFFF00000000, 0x00000000FFFFFFFF):
        n = isotropic_direction(np.uint64(word))
        assert np.isfinite(n).all()
        assert sum(x * x for x in n) == pytest.approx(1.0, abs=1e-12)


def test_normal_pairs(seed):
    pairs = normal_pairs(random_words(seed, "normal", 2_000_000))
    for values in pairs:
        assert stats.kstest(values[:500_000], "norm").pvalue > LEAST_P
        edges = stats.norm.ppf(np.linspace(0, 1, 201))
        edges[[0, -1]] = -10.0, 10.0
        assert stats.chisquare(np.histogram(values, edges)[0]).pvalue > LEAST_P
        beyond = np.count_nonzero(abs(values) > 4.0)  # the tail that the bins do not see
        expected = values.size * 2 * stats.norm.sf(4.0)
        assert abs(beyond - expected) < 4 * expected**0.5
    assert abs(np.corrcoef(pairs)[0, 1]) < 4 / pairs.shape[1] ** 0.5
    assert abs(np.corrcoef(pairs**2)[0, 1]) < 4 / pairs.shape[1] ** 0.5  # Box and Muller: the radius is shared
    for word in (0, 0xFFFFFFFFFFFFFFFF):
        assert np.hypot(*normal_pair(np.uint64(word))) <= 6.67  # what the majorant's reach relies on
