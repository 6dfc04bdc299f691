"""Numbers with their errors as text that fits a column."""

import math

_SMALLEST = 1e-290  # below this an error counts as none: powers of ten would underflow
_PLAIN_EXPONENTS = range(-2, 4)  # 0.01 to 9999 are shown without a power of ten


def format_estimate(value: float, standard_error: float, width: int | None = None) -> str:
    """Value with its error in the last digit: 1.042(3)e5, 4.13(2), -3.2(1)e-18.

    A value without a usable error (none, NaN, infinite) has four digits, a value that is no number is "-". Where the
    text would be longer than `width`, digits are dropped and the error is rounded up to the last one left.
    """
    if not math.isfinite(value):
        return "-"
    if not math.isfinite(standard_error) or standard_error < _SMALLEST:
        return compact(f"{value:.4g}")
    place = math.floor(math.log10(standard_error))
    error = round(standard_error / 10.0**place)
    if error == 10:
        place, error = place + 1, 1
    text = _compose(round(value / 10.0**place), error, place)
    while width is not None and len(text) > width and abs(value) > 10.0 ** (place + 1):
        place, error = place + 1, 1
        text = _compose(round(value / 10.0**place), error, place)
    return text


def format_bound(upper_bound: float) -> str:
    """An upper bound: <1.2e-22."""
    return "<" + compact(f"{upper_bound:.2g}")


def compact(text: str) -> str:
    """A number as text, its exponent without plus sign and leading zeros: 1.2e+05 is 1.2e5."""
    mantissa, mark, exponent = text.partition("e")
    return f"{mantissa}e{int(exponent)}" if mark else mantissa


def _compose(units: int, error: int, place: int) -> str:
    """Text of units x 10^place with an error of `error` in the last digit of `units`."""
    sign = "-" if units < 0 else ""
    digits = str(abs(units))
    exponent = len(digits) - 1 + place
    if place <= 0 and exponent in _PLAIN_EXPONENTS:
        return f"{sign}{_with_point(digits, -place)}({error})"
    return f"{sign}{_with_point(digits, len(digits) - 1)}({error})e{exponent}"


def _with_point(digits: str, decimals: int) -> str:
    if decimals == 0:
        return digits
    digits = digits.zfill(decimals + 1)
    return f"{digits[:-decimals]}.{digits[-decimals:]}"
