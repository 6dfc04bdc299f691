"""Coupled runs: every electron carries its random streams, so that two swarms can share them.

Two cohorts of slightly different gases, started alike, stay alike only if an electron of the one keeps meeting the
random numbers of its twin in the other, whatever the rest of the cohort does. So streams move with the electron between
lanes; they begin anew at every window from (identity, window), so that twins that parted come together again; and the
population is brought back to its size electron by electron, from each one's own random number, not by a comb whose
teeth shift for all electrons after a single event.
"""

import numpy as np
from numba import njit

from .bits import double_of, load, load_word, store, store_word
from .functions import ONE_BITS
from .lanes import COUPLED_FIELDS, ELECTRON_FIELDS, IDENTITY, STREAM, WEIGHT, X, Z
from .streams import GOLDEN, splitmix_output

_U12 = np.uint64(12)
_COPY = np.uint64(0xD1B54A32D192ED03)  # sets the words of copies apart from those of windows
_STREAM_WORDS = COUPLED_FIELDS - ELECTRON_FIELDS


@njit(forceinline=True)
def begin_streams(lane, window, rows, lanes):
    """Start both streams of the electron in `lane` from its identity and the number of the window."""
    state = splitmix_output(load_word(rows, lane + IDENTITY * lanes) + np.uint64(window) * GOLDEN)
    for word in range(_STREAM_WORDS):
        state += GOLDEN
        store_word(rows, lane + (STREAM + word) * lanes, splitmix_output(state))


@njit(forceinline=True)
def resample(alive, size, weight, window, rows, combed, lanes):
    """Bring `alive` electrons to `size` on average, of equal `weight`; returns their number.

    Each is copied floor(size / alive + u) times, u its own random number; copies after the first get new identities.
    Displacements since the start of the window begin anew.
    """
    rate = size / alive
    count = 0
    for lane in range(alive):
        identity = load_word(rows, lane + IDENTITY * lanes)
        word = splitmix_output((identity ^ _COPY) + np.uint64(window) * GOLDEN)
        copies = int(rate + double_of(np.int64(word >> _U12) | ONE_BITS) - 1.0)
        for copy in range(min(copies, lanes - count)):
            for field in range(ELECTRON_FIELDS):
                store(combed, count + field * lanes, load(rows, lane + field * lanes))
            if copy > 0:
                store_word(combed, count + IDENTITY * lanes, splitmix_output(word + np.uint64(copy) * GOLDEN))
            for axis in range(X, Z + 1):
                store(combed, count + axis * lanes, 0.0)
            store(combed, count + WEIGHT * lanes, weight)
            count += 1
    for field in range(ELECTRON_FIELDS):
        for j in range(count):
            store(rows, j + field * lanes, load(combed, j + field * lanes))
    return count
