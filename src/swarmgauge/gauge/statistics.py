"""Tests of agreement: chi-squared, and whether deviations keep their sign longer than chance would let them."""

from collections.abc import Sequence
from itertools import groupby
from math import comb

from scipy.special import chdtrc


def chi_squared_probability(chi_squared: float, count: int) -> float:
    """Probability that independent normal deviations of right size give this chi-squared or more."""
    return float(chdtrc(count, chi_squared))


def runs_of(signs: Sequence[bool]) -> int:
    """Number of runs of equal signs."""
    return sum(1 for _ in groupby(signs))


def runs_probability(runs: int, above: int, below: int) -> float:
    """Probability of so many runs or fewer where so many signs of either kind stand in random order, exact.

    A. Wald and J. Wolfowitz, Ann. Math. Stat. 11, 147 (1940).
    """
    ways = sum(_ways(count, above, below) for count in range(1, runs + 1))
    return ways / comb(above + below, above)


def _ways(runs: int, above: int, below: int) -> int:
    """Orders of the signs that have this number of runs."""
    if above == 0 or below == 0:
        return int(runs == 1)
    half, odd = divmod(runs, 2)
    if odd:
        return _split(above, half + 1) * _split(below, half) + _split(above, half) * _split(below, half + 1)
    return 2 * _split(above, half) * _split(below, half)


def _split(count: int, parts: int) -> int:
    """Ways to cut a row of `count` into so many parts, none empty."""
    return comb(count - 1, parts - 1) if parts > 0 else 0


def one_sign_probability(count: int) -> float:
    """Probability that all of so many deviations have the same sign by chance."""
    return 2.0 * 0.5**count
