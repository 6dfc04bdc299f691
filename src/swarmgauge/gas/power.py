"""Powers, exponentials, logarithms and cosines with the same bits on every processor.

numpy's and libm's pow, exp and log differ in the last bit between vector widths and versions. Here only operations
act that IEEE 754 rounds exactly (+ - * / sqrt) or that are exact (splitting off and adding binary exponents).
"""

import math

import numpy as np

_LOG2_E = 1.4426950408889634
_LN_2 = 0.6931471805599453
# ln 2 in two parts, the first with 32 bits, so that whole x _LN_2_HIGH is exact.
_LN_2_HIGH, _LN_2_LOW = 0.693147180369123816490, 1.90821492927058770002e-10
# 2 atanh(s) = 2 s (1 + z/3 + z^2/5 + ...), z = s^2 < 0.0295: what is left out is below 1e-18.
_ATANH = tuple(1.0 / (2 * k + 1) for k in range(12))
_PI = 3.141592653589793
# sin(y) / y = 1 - y^2/6 + ..., y < 1.571: what is left out is below 1e-18.
_SINE = tuple((-1) ** k / math.factorial(2 * k + 1) for k in range(13))
# exp(y) = 1 + y + y^2/2 + ..., |y| < 0.347: what is left out is below 1e-18.
_EXP = (
    1.0,
    1.0,
    1.0 / 2.0,
    1.0 / 6.0,
    1.0 / 24.0,
    1.0 / 120.0,
    1.0 / 720.0,
    1.0 / 5040.0,
    1.0 / 40320.0,
    1.0 / 362880.0,
    1.0 / 3628800.0,
    1.0 / 39916800.0,
    1.0 / 479001600.0,
    1.0 / 6227020800.0,
)


def _polynomial(x: np.ndarray, coefficients: tuple[float, ...]) -> np.ndarray:
    value = np.full_like(x, coefficients[-1])
    for coefficient in reversed(coefficients[:-1]):
        value = value * x + coefficient
    return value


def _by_roots(base: np.ndarray, exponent: float) -> np.ndarray | None:
    """Exponents of -1, -1/2, 0, 1/2 and 1, correctly rounded or nearly so; None for all others."""
    if exponent == 0.0:
        return np.ones_like(base)
    if abs(exponent) not in (0.5, 1.0):
        return None
    power = np.sqrt(base) if abs(exponent) == 0.5 else base.copy()
    return power if exponent > 0.0 else 1.0 / power


def _split_log(x: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """n and ln m of x = 2^n m, m between sqrt(1/2) and sqrt(2); both float64."""
    mantissa, two = np.frexp(x)
    low = mantissa < 0.7071067811865476
    mantissa, two = np.where(low, 2.0 * mantissa, mantissa), np.where(low, two - 1, two).astype(np.float64)
    s = (mantissa - 1.0) / (mantissa + 1.0)
    return two, 2.0 * s * _polynomial(s * s, _ATANH)


def strict_power(base: np.ndarray, exponent: float) -> np.ndarray:
    """base ** exponent, with the same bits on every processor.

    base : ndarray of any shape, >= 0. Relative error below 3e-16 (2 + |exponent log2(base)|). 0 to a negative power is
    infinite, as is what overflows.
    """
    base = np.asarray(base, dtype=np.float64)
    with np.errstate(divide="ignore", over="ignore", under="ignore"):
        simple = _by_roots(base, exponent)
        if simple is not None:
            return simple
        positive = np.where(base > 0.0, base, 1.0)
        two, ln_mantissa = _split_log(positive)
        log2_mantissa = ln_mantissa * _LOG2_E
        whole = np.rint(exponent * (two + log2_mantissa))
        rest = (exponent * two - whole) + exponent * log2_mantissa
        limited = np.clip(whole, -1100.0, 1100.0).astype(np.int32)
        value = np.ldexp(_polynomial(np.clip(rest, -2.0, 2.0) * _LN_2, _EXP), limited)
        return np.where(base > 0.0, value, 0.0 if exponent > 0.0 else np.inf)


def strict_exp(x: np.ndarray) -> np.ndarray:
    """exp(x), with the same bits on every processor; x : ndarray of any shape. Relative error below 1e-15."""
    x = np.asarray(x, dtype=np.float64)
    with np.errstate(over="ignore", under="ignore"):
        limited = np.clip(x, -760.0, 720.0)  # beyond these the result is 0 or infinite
        whole = np.rint(limited * _LOG2_E)
        rest = (limited - whole * _LN_2_HIGH) - whole * _LN_2_LOW
        return np.ldexp(_polynomial(rest, _EXP), whole.astype(np.int32))


def strict_log(x: np.ndarray) -> np.ndarray:
    """Natural logarithm of x > 0, ndarray of any shape, with the same bits on every processor.

    Error below 1e-15, or 1e-15 of the result where that is larger.
    """
    two, ln_mantissa = _split_log(np.asarray(x, dtype=np.float64))
    return two * _LN_2_HIGH + (two * _LN_2_LOW + ln_mantissa)


def strict_cosine(degrees: np.ndarray) -> np.ndarray:
    """cos of 0 to 180 degrees, ndarray of any shape, with the same bits on every processor; error below 1e-15."""
    half = np.asarray(degrees, dtype=np.float64) * (_PI / 360.0)
    sine = half * _polynomial(half * half, _SINE)
    return 1.0 - 2.0 * sine * sine
