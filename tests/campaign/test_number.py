"""Numbers with their errors as text."""

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from swarmgauge.campaign.number import compact, format_bound, format_estimate


@pytest.mark.parametrize(
    ("value", "error", "text"),
    [
        (104200.0, 300.0, "1.042(3)e5"),
        (-104200.0, 300.0, "-1.042(3)e5"),
        (4.126, 0.021, "4.13(2)"),
        (12.34, 0.05, "12.34(5)"),
        (0.0123, 0.0004, "0.0123(4)"),
        (8765.0, 2.0, "8765(2)"),
        (8767.0, 20.0, "8.77(2)e3"),
        (1.5e24, 3e22, "1.50(3)e24"),
        (-3.21e-18, 1e-19, "-3.2(1)e-18"),
        (9.996, 0.02, "10.00(2)"),  # rounds up to one more digit
        (1.0, 0.096, "1.0(1)"),  # so does the error
        (1.2e-18, 3e-18, "1(3)e-18"),  # an error larger than the value
        (0.0, 2e-18, "0(2)e-18"),
        (0.0, 0.0, "0"),
        (0.25, 0.0, "0.25"),
        (123456.0, math.nan, "1.235e5"),
        (123456.0, math.inf, "1.235e5"),
        (math.nan, 1.0, "-"),
        (math.inf, 1.0, "-"),
    ],
)
def test_estimates(value, error, text):
    assert format_estimate(value, error) == text


@pytest.mark.parametrize(
    ("value", "error", "width", "text"),
    [
        (104234.5, 5.0, 10, "1.042(1)e5"),  # the error is rounded up, never away
        (104234.5, 5.0, 11, "1.0423(1)e5"),
        (1.23456e24, 2e20, 10, "1.23(1)e24"),
        (4.1234567, 1e-6, 9, "4.1235(1)"),
    ],
)
def test_narrow_columns_drop_digits(value, error, width, text):
    assert format_estimate(value, error, width) == text


def test_bounds():
    assert format_bound(1.234e-22) == "<1.2e-22"
    assert compact("1.2e+05") == "1.2e5"


def value_and_error(text):
    number, error, exponent = re.fullmatch(r"(-?[\d.]+)\((\d)\)(?:e(-?\d+))?", text).groups()
    place = len(number.partition(".")[2])
    power = int(exponent or 0)
    return float(f"{number}e{power}"), int(error) * 10.0 ** (power - place)


@given(
    mantissa=st.floats(-9.99, 9.99).filter(lambda x: abs(x) > 0.1),
    exponent=st.integers(-45, 40),
    relative=st.floats(1e-7, 0.9),
    width=st.sampled_from([None, 10, 12]),
)
def test_text_says_value_and_error(mantissa, exponent, relative, width):
    value = mantissa * 10.0**exponent
    error = relative * abs(value)
    read, read_error = value_and_error(format_estimate(value, error, width))
    assert abs(read - value) <= 0.5001 * max(read_error, error) + 1e-12 * abs(value)
    assert read_error >= 0.66 * error  # one digit: 1.4999 is shown as 1
    if width is None:
        assert read_error <= 1.51 * error


@given(
    value=st.floats(1.0, 9.999),
    exponent=st.integers(-45, 40),
    relative=st.floats(1e-7, 0.09),
)
def test_text_fits_its_column(value, exponent, relative):
    # A positive value takes ten places where its power of ten has two digits or fewer.
    text = format_estimate(value * 10.0**exponent, relative * value * 10.0**exponent, 10)
    assert len(text) <= 10
