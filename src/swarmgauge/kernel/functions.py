"""Logarithm, exponential, sine and cosine from + - * / alone.

Two reasons: PyPI's llvmlite has no vector math library, so calls to libm would keep the hot loop scalar; and libm
differs between machines in the last bit, while these give the same bits everywhere.
"""

import math

from numba import njit

from .bits import bits_of, double_of

ONE_BITS = 0x3FF0000000000000  # the bits of 1.0
MANTISSA = 0x000FFFFFFFFFFFFF
_TWO52_BITS = (
    0x4330000000000000  # the bits of 2^52: or-ing a small integer in makes 2^52 + integer, without a conversion
)
_LN2 = 0.6931471805599453
_SQRT2 = 1.4142135623730951
_LN2_HIGH = 0.693147180369123816490  # its product with a whole number below 2^20 is exact
_LN2_LOW = 1.90821492927058770002e-10
_LARGEST_EXPONENT = 700.0


@njit(forceinline=True, error_model="numpy")
def log(x):
    """Natural logarithm of a positive normal double, relative error below 1e-13.

    x = 2^e m with m in [sqrt(1/2), sqrt(2)); ln m = 2 artanh(s), s = (m - 1)/(m + 1), |s| < 0.172.
    """
    bits = bits_of(x)
    exponent = double_of((bits >> 52) | _TWO52_BITS) - (4503599627370496.0 + 1023.0)
    m = double_of((bits & MANTISSA) | ONE_BITS)
    big = m > _SQRT2
    m = 0.5 * m if big else m
    exponent = exponent + 1.0 if big else exponent
    s = (m - 1.0) / (m + 1.0)
    q = s * s
    series = 1 / 11.0 + q * (1 / 13.0 + q * (1 / 15.0))
    series = q * (1 / 3.0 + q * (1 / 5.0 + q * (1 / 7.0 + q * (1 / 9.0 + q * series))))
    return exponent * _LN2 + 2.0 * (s + s * series)


@njit(forceinline=True, error_model="numpy")
def exp(x):
    """Exponential of x, cut at +-700; relative error below 1e-13.

    x = k ln 2 + r with |r| < 0.35: 2^k from bits, e^r by its Taylor series of degree 11 (remainder 7e-15).
    """
    x = _LARGEST_EXPONENT if x > _LARGEST_EXPONENT else x
    x = -_LARGEST_EXPONENT if x < -_LARGEST_EXPONENT else x
    k = math.floor(x * (1.0 / _LN2) + 0.5)
    r = (x - k * _LN2_HIGH) - k * _LN2_LOW
    series = 1 / 40320.0 + r * (1 / 362880.0 + r * (1 / 3628800.0 + r * (1 / 39916800.0)))
    series = 1 / 24.0 + r * (1 / 120.0 + r * (1 / 720.0 + r * (1 / 5040.0 + r * series)))
    series = 1.0 + r * (1.0 + r * (0.5 + r * (1 / 6.0 + r * series)))
    return series * double_of((int(k) + 1023) << 52)


@njit(forceinline=True, error_model="numpy")
def sincos_turn(fraction):
    """Sine and cosine of 2 pi (fraction - 1.5), fraction in [1, 2); absolute error below 1e-13.

    Taylor series of the half angle h in [-pi/2, pi/2), then sin = 2 s c and cos = c^2 - s^2.
    """
    h = (fraction - 1.5) * math.pi
    q = h * h
    s = -1 / 1307674368000.0 + q * (1 / 355687428096000.0 + q * (-1 / 121645100408832000.0))
    s = -1 / 5040.0 + q * (1 / 362880.0 + q * (-1 / 39916800.0 + q * (1 / 6227020800.0 + q * s)))
    s = h * (1.0 + q * (-1 / 6.0 + q * (1 / 120.0 + q * s)))
    c = -1 / 87178291200.0 + q * (1 / 20922789888000.0 + q * (-1 / 6402373705728000.0))
    c = -1 / 720.0 + q * (1 / 40320.0 + q * (-1 / 3628800.0 + q * (1 / 479001600.0 + q * c)))
    c = 1.0 + q * (-0.5 + q * (1 / 24.0 + q * c))
    return 2.0 * s * c, c * c - s * s
