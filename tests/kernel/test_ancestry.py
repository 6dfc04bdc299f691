"""Families and growth of a cohort; coupled runs: identities, streams, resampling."""

import numpy as np
import pytest

from swarmgauge.kernel.ancestry import count_families, found_families
from swarmgauge.kernel.cohort import past_growth
from swarmgauge.kernel.coupled import begin_streams, resample
from swarmgauge.kernel.history import EFFECTIVE_SIZE, FAMILIES, MEMORIES, POINT_SUMS
from swarmgauge.kernel.lanes import (
    ANCESTOR,
    COUPLED_FIELDS,
    ELECTRON_FIELDS,
    IDENTITY,
    ROWS,
    SLOT,
    SPARE_STREAM,
    STREAM,
    WEIGHT,
    Z,
)
from swarmgauge.kernel.streams import splitmix_words

LANES = 1544


def test_families_by_hand():
    # weights 1 + 1, 3 and 1 of three families: W = 6, W^2 / sum W_a^2 = 36 / (4 + 9 + 1)
    rows = np.zeros((ROWS, 8))
    rows[ANCESTOR, :4] = [5, 5, 0, 2]
    rows[WEIGHT, :4] = [1, 1, 3, 1]
    sums = np.zeros(POINT_SUMS)
    for _ in range(2):
        count_families(4, rows.ravel(), np.full(8, 9.0), sums, 8)
    assert sums[MEMORIES] == 2
    assert sums[FAMILIES] == 6
    assert sums[EFFECTIVE_SIZE] == pytest.approx(2 * 36 / 14, rel=1e-15)
    found_families(4, rows.ravel(), 8)
    assert rows[ANCESTOR, :4].tolist() == [0, 1, 2, 3]


def test_growth_over_a_memory_by_hand():
    # three lags: the populations grew by 2, 3, 5 and 7 in turn, and only the last three count
    growth = np.ones(4)
    weight, weights = 1.0, []
    for window, factor in enumerate((2.0, 3.0, 5.0, 7.0)):
        weight = past_growth(100 * weight * factor, 100, window, growth, 3)
        weights.append(weight)
    assert weights == [2.0, 6.0, 30.0, 105.0]


def identified(count):
    """Rows of `count` electrons with random identities; SLOT tells them apart."""
    rows = np.zeros((ROWS, LANES))
    rows[SLOT, :count] = np.arange(count)
    rows[WEIGHT, :count] = 1.0
    rows[Z, :count] = 7.0
    rows.view(np.uint64)[IDENTITY, :count] = np.random.default_rng(5).integers(0, 2**64, count, dtype=np.uint64)
    return rows


def resampled(rows, alive, size, window):
    mine = rows.copy()
    count = resample(alive, size, 1.0, window, mine.ravel(), np.zeros(ELECTRON_FIELDS * LANES), LANES)
    return mine[:, :count]


def test_streams_depend_on_identity_and_window_only():
    rows = identified(2)
    words = rows.view(np.uint64)
    words[IDENTITY, 1] = words[IDENTITY, 0]
    begin_streams(0, 3, rows.ravel(), LANES)
    begin_streams(1, 3, rows.ravel(), LANES)
    first = words[STREAM:COUPLED_FIELDS, 0].copy()
    assert (first == words[STREAM:COUPLED_FIELDS, 1]).all()
    assert len(set(first.tolist())) == COUPLED_FIELDS - STREAM
    assert SPARE_STREAM == STREAM + 4
    # the words are those of SplitMix64 from the state that identity and window give
    state = int(splitmix_words((int(words[IDENTITY, 0]) + 2 * 0x9E3779B97F4A7C15) % 2**64, 1)[0])
    assert first.tolist() == splitmix_words(state, 8).tolist()
    begin_streams(0, 4, rows.ravel(), LANES)
    assert not set(first.tolist()) & set(words[STREAM:COUPLED_FIELDS, 0].tolist())


def test_an_unchanged_population_is_left_alone():
    rows = identified(1000)
    mine = resampled(rows, 1000, 1000, 1)
    assert (mine[SLOT] == np.arange(1000)).all()
    assert (mine[Z] == 0.0).all()


@pytest.mark.parametrize("alive", [900, 1100])
def test_resampling_copies_every_electron_alike(alive):
    # each electron is taken size / alive times on average: counts over 400 windows are binomial
    rows = identified(alive)
    taken = np.zeros(alive)
    for window in range(400):
        mine = resampled(rows, alive, 1000, window)
        np.add.at(taken, mine[SLOT].astype(int), 1)
        identities = mine.view(np.uint64)[IDENTITY]
        assert len(np.unique(identities)) == len(identities)
    rate = 1000 / alive
    part = rate - int(rate)
    error = (400 * part * (1 - part)) ** 0.5
    assert abs(taken.mean() - 400 * rate) < 3 * error / alive**0.5
    assert 0.85 < taken.std() / error < 1.15


def test_what_happens_to_others_does_not_matter():
    # Without one electron, at the same rate, all others fare as before: that keeps coupled swarms together.
    rows = identified(1100)
    before = resampled(rows, 1100, 1100 * 0.9, 8)
    others = np.delete(rows, 17, axis=1)
    after = resampled(np.concatenate([others, np.zeros((ROWS, 1))], axis=1), 1099, 1099 * 0.9, 8)
    assert [s for s in before[SLOT] if s != 17] == after[SLOT].tolist()
