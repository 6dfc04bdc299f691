"""Random streams: published vectors, a twin in plain integers, uniformity, independence of lanes."""

import numpy as np
import pytest
from numba import njit
from scipy import stats

from swarmgauge.kernel.lanes import ROWS, SPARE_STREAM, STREAM
from swarmgauge.kernel.start import launch
from swarmgauge.kernel.streams import (
    advance_state,
    cohort_start,
    load_state,
    lower_one_to_two,
    next_word,
    one_to_two,
    seeded_streams,
    splitmix_words,
    store_state,
    upper_one_to_two,
)

WORD = (1 << 64) - 1
LEAST_P = 1e-4  # fixed seeds: a sound generator passes this once and for all


def plain_splitmix(state):
    """SplitMix64 as S. Vigna's public-domain C code has it, in Python integers."""
    while True:
        state = (state + 0x9E3779B97F4A7C15) & WORD
        z = state
        z = ((z ^ (z >> 30)) * 0xBF58476D1CE4E5B9) & WORD
        z = ((z ^ (z >> 27)) * 0x94D049BB133111EB) & WORD
        yield z ^ (z >> 31)


def plain_xoshiro(s):
    """xoshiro256++ (D. Blackman and S. Vigna, ACM Trans. Math. Softw. 47, 36 (2021)), in Python integers."""

    def rotated(x, k):
        return ((x << k) | (x >> (64 - k))) & WORD

    s = list(s)
    while True:
        yield (rotated((s[0] + s[3]) & WORD, 23) + s[0]) & WORD
        t = (s[1] << 17) & WORD
        s[2] ^= s[0]
        s[3] ^= s[1]
        s[1] ^= s[2]
        s[0] ^= s[3]
        s[2] ^= t
        s[3] = rotated(s[3], 45)


@njit
def words_of(state, count):
    """`count` outputs of the stream with these four state words."""
    s0, s1, s2, s3 = state[0], state[1], state[2], state[3]
    words = np.empty(count, dtype=np.uint64)
    for i in range(count):
        words[i], s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
    return words


@njit
def three_readings(words):
    """The three ways in which a word becomes a double, less 1: shape (3, words)."""
    result = np.empty((3, words.size))
    for i in range(words.size):
        result[0, i] = one_to_two(words[i]) - 1.0
        result[1, i] = upper_one_to_two(words[i]) - 1.0
        result[2, i] = lower_one_to_two(words[i]) - 1.0
    return result


def test_splitmix_vector():
    # Outputs from states 0 and 1234567 as they are widely published with the C code; from memory.
    zero = [0xE220A8397B1DCDAF, 0x6E789E6AA1B965F4, 0x06C45D188009454F, 0xF88BB8A8724C81EC]
    other = [6457827717110365317, 3203168211198807973, 9817491932198370423, 4593380528125082431]
    assert splitmix_words(0, 4).tolist() == zero
    assert splitmix_words(1234567, 4).tolist() == other


def test_xoshiro_vector():
    # Outputs from state (1, 2, 3, 4), the vector printed with several published implementations; from memory.
    published = [
        41943041,
        58720359,
        3588806011781223,
        3591011842654386,
        9228616714210784205,
        9973669472204895162,
        14011001112246962877,
        12406186145184390807,
        15849039046786891736,
        10450023813501588000,
    ]
    assert words_of(np.array([1, 2, 3, 4], dtype=np.uint64), 10).tolist() == published


@pytest.mark.parametrize("start", [0, 42, 0xFFFFFFFFFFFFFFFF])
def test_lanes_take_the_words_of_one_sequence(start):
    sequence = plain_splitmix(start)
    states = seeded_streams(start, 5)
    for lane in range(5):
        state = [next(sequence) for _ in range(4)]
        assert states[:, lane].tolist() == state
        stream = plain_xoshiro(state)
        assert words_of(np.ascontiguousarray(states[:, lane]), 50).tolist() == [next(stream) for _ in range(50)]


def test_streams_in_the_lane_array(seed):
    lanes, start = 16, cohort_start(seed, "key", 3)
    rows = np.zeros(ROWS * lanes)
    launch(rows, start, 0, lanes, np.array([0.0, 1.0]), np.array([0.0, 1.0]))
    states = seeded_streams(start, 2 * lanes)
    for lane in (0, 7, 15):
        assert list(load_state(rows, lane + STREAM * lanes, lanes)) == states[:, lane].tolist()
        stream = plain_xoshiro(states[:, lanes + lane].tolist())
        for _ in range(3):
            word = next_word(rows, lane, lanes)
            assert int(word) == next(stream)
    store_state(rows, 7 + SPARE_STREAM * lanes, lanes, *(np.uint64(k) for k in (1, 2, 3, 4)))
    assert int(next_word(rows, 7, lanes)) == 41943041  # of the vector above


def test_cohorts_start_apart():
    starts = {cohort_start(s, key, c) for s in (0, 1, 10) for key in ("a", "b", "1/a") for c in (-1, 0, 1, 10, 100)}
    assert len(starts) == 3 * 3 * 5
    assert cohort_start(7, "key", 4) == cohort_start(7, "key", 4)


def test_reading_of_doubles():
    # The doubles are built from bits: against exact arithmetic on Python integers.
    words = splitmix_words(5, 1000)
    readings = three_readings(words)
    assert readings[0].tolist() == [(int(w) >> 12) / 2.0**52 for w in words]
    assert readings[1].tolist() == [(int(w) >> 32) / 2.0**32 for w in words]
    assert readings[2].tolist() == [(int(w) & 0xFFFFFFFF) / 2.0**32 for w in words]


def test_uniformity(seed):
    words = words_of(np.ascontiguousarray(seeded_streams(cohort_start(seed, "uniform", 0), 1)[:, 0]), 2_000_000)
    for reading in three_readings(words):
        counts = np.bincount((reading * 1000).astype(int), minlength=1000)
        assert stats.chisquare(counts).pvalue > LEAST_P
        assert stats.kstest(reading[:200_000], "uniform").pvalue > LEAST_P
        pairs = np.bincount((reading[:-1] * 64).astype(int) * 64 + (reading[1:] * 64).astype(int), minlength=4096)
        assert stats.chisquare(pairs).pvalue > LEAST_P
    ones = np.array([np.count_nonzero(words >> np.uint64(bit) & np.uint64(1)) for bit in range(64)])
    assert stats.chi2(64).sf((((ones - 1e6) ** 2) / 5e5).sum()) > LEAST_P


def test_lanes_are_independent(seed):
    # Correlation coefficients of independent samples of n are normal with variance 1/n.
    lanes, count = 60, 20_000
    states = seeded_streams(cohort_start(seed, "lanes", 0), lanes)
    uniform = np.array([three_readings(words_of(np.ascontiguousarray(s), count))[0] for s in states.T])
    for shift in (0, 1, 2):  # of one lane against the next flight of another
        correlation = np.corrcoef(uniform[:, : count - shift], uniform[:, shift:])[:lanes, lanes:]
        off = correlation[np.triu_indices(lanes, 1)] if shift == 0 else correlation.ravel()
        assert stats.chi2(off.size).sf(count * (off**2).sum()) > LEAST_P
        assert abs(off).max() * count**0.5 < 5.5


def test_first_words_across_cohorts(seed):
    # The first output of a lane of many cohorts: what a start distribution is drawn from.
    starts = [seeded_streams(cohort_start(seed, "first", cohort), 1)[:, 0].tolist() for cohort in range(5000)]
    values = np.array([next(plain_xoshiro(state)) / 2.0**64 for state in starts])
    assert stats.kstest(values, "uniform").pvalue > LEAST_P
    assert abs(np.corrcoef(values[:-1], values[1:])[0, 1]) < 4 / 5000**0.5
