"""Random numbers: one xoshiro256++ stream per lane, seeded by SplitMix64.

Lane L of a cohort takes words 4L .. 4L+3 of one SplitMix64 sequence, whose start is a hash of (seed, stream key,
cohort). Streams belong to lanes, never to electrons, threads or workers.

References: D. Blackman and S. Vigna, ACM Trans. Math. Softw. 47, 36 (2021) (xoshiro256++);
G. L. Steele, D. Lea and C. H. Flood, OOPSLA 2014 (SplitMix64).
"""

import hashlib

import numpy as np
from numba import njit

from .bits import double_of, load_word, store_word
from .functions import ONE_BITS
from .lanes import SPARE_STREAM

GOLDEN = np.uint64(0x9E3779B97F4A7C15)
_MIX1 = np.uint64(0xBF58476D1CE4E5B9)
_MIX2 = np.uint64(0x94D049BB133111EB)
_U12 = np.uint64(12)
_U17 = np.uint64(17)
_U19 = np.uint64(19)
_U20 = np.uint64(20)
_U23 = np.uint64(23)
_U27 = np.uint64(27)
_U30 = np.uint64(30)
_U31 = np.uint64(31)
_U32 = np.uint64(32)
_U41 = np.uint64(41)
_U45 = np.uint64(45)
_LOW32 = np.uint64(0xFFFFFFFF)


def splitmix_words(start: int, count: int) -> np.ndarray:
    """The first `count` outputs of SplitMix64 from state `start`; shape (count,), uint64."""
    with np.errstate(over="ignore"):
        z = np.uint64(start & 0xFFFFFFFFFFFFFFFF) + GOLDEN * np.arange(1, count + 1, dtype=np.uint64)
        z = (z ^ (z >> _U30)) * _MIX1
        z = (z ^ (z >> _U27)) * _MIX2
        return z ^ (z >> _U31)


@njit(forceinline=True)
def splitmix_output(z):
    """The output of SplitMix64 at state `z` (uint64)."""
    z = (z ^ (z >> _U30)) * _MIX1
    z = (z ^ (z >> _U27)) * _MIX2
    return z ^ (z >> _U31)


def cohort_start(seed: int, stream_key: str, cohort: int) -> int:
    """Start of the SplitMix64 sequence of one cohort: 64 bits of a SHA-256 over seed, key and cohort number."""
    text = f"{seed}/{stream_key}/{cohort}".encode()
    return int.from_bytes(hashlib.sha256(text).digest()[:8], "little")


def seeded_streams(start: int, count: int) -> np.ndarray:
    """States of `count` streams; shape (4, count), uint64; stream L has words 4L .. 4L+3 of the sequence."""
    return splitmix_words(start, 4 * count).reshape(count, 4).T


@njit(forceinline=True)
def advance_state(s0, s1, s2, s3):
    """One step of xoshiro256++: (output, new state words)."""
    total = s0 + s3
    output = ((total << _U23) | (total >> _U41)) + s0
    shifted = s1 << _U17
    s2 ^= s0
    s3 ^= s1
    s1 ^= s2
    s0 ^= s3
    s2 ^= shifted
    s3 = (s3 << _U45) | (s3 >> _U19)
    return output, s0, s1, s2, s3


@njit(forceinline=True)
def load_state(rows, at, lanes):
    """The four state words of the stream whose first word is at index `at`."""
    return (
        load_word(rows, at),
        load_word(rows, at + lanes),
        load_word(rows, at + 2 * lanes),
        load_word(rows, at + 3 * lanes),
    )


@njit(forceinline=True)
def store_state(rows, at, lanes, s0, s1, s2, s3):
    """Write the state words back."""
    store_word(rows, at, s0)
    store_word(rows, at + lanes, s1)
    store_word(rows, at + 2 * lanes, s2)
    store_word(rows, at + 3 * lanes, s3)


@njit(forceinline=True)
def next_word(rows, lane, lanes):
    """The next 64 bits of a lane's spare stream, which moves on; for work outside the vector loop."""
    at = lane + SPARE_STREAM * lanes
    s0, s1, s2, s3 = load_state(rows, at, lanes)
    output, s0, s1, s2, s3 = advance_state(s0, s1, s2, s3)
    store_state(rows, at, lanes, s0, s1, s2, s3)
    return output


@njit(forceinline=True)
def one_to_two(word):
    """A double in [1, 2) from the upper 52 bits: bits are set, since uint64 to double is slow without AVX-512DQ."""
    return double_of(np.int64(word >> _U12) | ONE_BITS)


@njit(forceinline=True)
def upper_one_to_two(word):
    """A double in [1, 2) from the upper 32 bits."""
    return double_of(np.int64((word >> _U32) << _U20) | ONE_BITS)


@njit(forceinline=True)
def lower_one_to_two(word):
    """A double in [1, 2) from the lower 32 bits."""
    return double_of(np.int64((word & _LOW32) << _U20) | ONE_BITS)
