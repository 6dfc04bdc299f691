"""A value with its standard error, and the jackknife that gives it."""

import math
from dataclasses import dataclass

import numpy as np
from scipy.special import stdtrit


@dataclass(frozen=True)
class Estimate:
    """A computed quantity.

    value, standard_error, unit : the estimate; the error is NaN where a process was never seen (value 0), or in too
        few excursions to tell an error, and 0 where the value is exact.
    samples : independent cohorts behind it.
    upper_bound : 95 % upper bound, only where a process was never seen or too seldom; otherwise NaN.
    signed : whether the bound is one of the amount of a quantity that may have either sign.
    """

    value: float
    standard_error: float
    unit: str
    samples: int
    upper_bound: float = math.nan
    signed: bool = False

    def interval(self, level: float = 0.95) -> tuple[float, float]:
        """Central confidence interval at `level` (0.68, 0.95, 0.99, ...) by Student's t with samples - 1 degrees.

        Where a process was never seen, or too seldom: from 0 (or minus the bound, if signed) to the upper bound,
        whatever the level up to 0.95, NaN above.
        """
        if not math.isnan(self.upper_bound):
            bound = self.upper_bound if level <= 0.95 else math.nan
            return -bound if self.signed else 0.0, bound
        reach = float(stdtrit(self.samples - 1, 0.5 + 0.5 * level)) * self.standard_error
        return self.value - reach, self.value + reach

    def __repr__(self) -> str:
        if not math.isnan(self.upper_bound):
            amount = "|x| " if self.signed else ""
            return f"{amount}< {self.upper_bound:.2g} {self.unit} (95 %)".rstrip()
        return f"{with_error(self.value, self.standard_error)} {self.unit}".rstrip()


def with_error(value: float, error: float) -> str:
    """`value` with its error in brackets, in units of the last digit shown: 1.042(3)e5.

    One error digit, two where the first is a 1. Without a usable error (NaN, infinite, zero) four digits are shown.
    """
    if not math.isfinite(value):
        return "nan"
    if not math.isfinite(error) or error <= 0.0:
        return f"{value:.4g}"
    exponent = math.floor(math.log10(max(abs(value), error)))
    place = math.floor(math.log10(error))
    if error / 10.0**place < 1.95:
        place -= 1
    digits = round(error / 10.0**place)
    decimals = max(exponent - place, 0)
    text = f"{value / 10.0**exponent:.{decimals}f}({digits})"
    return text if exponent == 0 else f"{text}e{exponent}"


def jackknife(function, sums: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Values, standard errors and deviations of `function` of the mean of independent rows, leaving out one at a time.

    function : maps (rows, columns) to (rows, quantities), each row for itself; sums : (cohorts, columns).
    deviations, (cohorts, quantities): sums of their products over cohorts are the covariances.
    The value is function(mean of all), never a mean of ratios. Errors: B. Efron, The Jackknife, the Bootstrap and Other
    Resampling Plans, SIAM 1982, eq. 3.4. Column sums are exact (math.fsum), so that their order does not matter.
    """
    count = len(sums)
    total = np.array([math.fsum(column) for column in sums.T.tolist()])
    value = function((total / count)[None, :])[0]
    without = function((total - sums) / (count - 1))
    centre = np.array([math.fsum(column) for column in without.T.tolist()]) / count
    deviations = (without - centre) * math.sqrt((count - 1) / count)
    squares = np.array([math.fsum(column) for column in (deviations**2).T.tolist()])
    return value, np.sqrt(squares), deviations
