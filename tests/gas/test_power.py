"""Strict powers and exponentials against decimal arithmetic of 40 digits, and their bits under other instructions."""

import decimal
import os
import subprocess
import sys

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from numpy._core._multiarray_umath import __cpu_dispatch__, __cpu_features__

from swarmgauge.gas.power import strict_exp, strict_log, strict_power

EXPONENTS = [-3.0, -1.77, -1.0, -0.9, -0.5, 0.0, 0.33, 0.5, 1.0, 2.0, 2.53]


def exact(base, exponent):
    with decimal.localcontext() as context:
        context.prec = 40
        return decimal.Decimal(base) ** decimal.Decimal(exponent)


@pytest.mark.parametrize("exponent", EXPONENTS)
def test_accuracy_over_all_energies(exponent):
    bases = np.concatenate([np.geomspace(1e-8, 1e6, 400), 1.0 + np.linspace(-1e-3, 1e-3, 101)])
    values = strict_power(bases, exponent)
    errors = [
        abs(float(decimal.Decimal(float(value)) / exact(float(base), exponent) - 1))
        for base, value in zip(bases, values, strict=True)
    ]
    bound = 3e-16 * (2.0 + np.abs(exponent * np.log2(bases)))
    assert (np.array(errors) < bound).all()
    near = (bases >= 1.0) & (bases <= 1e3)
    assert np.array(errors)[near].max() < 1e-14


@settings(derandomize=True)
@given(st.floats(1e-300, 1e300), st.floats(-20.0, 20.0))
def test_any_power_has_no_surprise(base, exponent):
    value = float(strict_power(np.array(base), exponent))
    reference = exact(base, exponent)
    if reference > decimal.Decimal("1.79e308"):
        assert value > 1.7e308
    elif reference < decimal.Decimal("1e-300"):
        assert 0.0 <= value < 1.01e-300
    else:
        assert float(abs(decimal.Decimal(value) / reference - 1)) < 3e-16 * (2.0 + abs(exponent * np.log2(base)))


def test_ends_and_shape():
    np.testing.assert_array_equal(strict_power(np.array([0.0, 1.0]), -1.5), [np.inf, 1.0])
    np.testing.assert_array_equal(strict_power(np.array([0.0, 1.0]), 1.5), [0.0, 1.0])
    np.testing.assert_array_equal(strict_power(np.array([0.0, 4.0]), -0.5), [np.inf, 0.5])
    np.testing.assert_array_equal(strict_power(np.array([0.0, 4.0]), 0.0), [1.0, 1.0])
    assert strict_power(np.ones((2, 3)), -0.9).shape == (2, 3)


@settings(derandomize=True)
@given(st.floats(-745.0, 709.0))
def test_any_exponential(x):
    with decimal.localcontext() as context:
        context.prec = 40
        reference = decimal.Decimal(x).exp()
    value = float(strict_exp(np.array(x)))
    if x > -708.0:
        assert float(abs(decimal.Decimal(value) / reference - 1)) < 1e-15
    else:  # numbers below 2.2e-308 have fewer digits
        assert abs(value - float(reference)) <= 1e-323


def test_ends_of_the_exponential():
    ends = np.array([-np.inf, -800.0, 0.0, 710.0, np.inf])
    np.testing.assert_array_equal(strict_exp(ends), [0.0, 0.0, 1.0, np.inf, np.inf])
    assert strict_exp(np.ones((2, 3))).shape == (2, 3)


@settings(derandomize=True)
@given(st.floats(1e-300, 1e300) | st.floats(0.9, 1.1))
def test_any_logarithm(x):
    with decimal.localcontext() as context:
        context.prec = 40
        reference = decimal.Decimal(x).ln()
    error = float(abs(decimal.Decimal(float(strict_log(np.array(x)))) - reference))
    assert error < 1e-15 * max(1.0, abs(float(reference)))


PROGRAM = """
import hashlib, json
import numpy as np
from swarmgauge.gas import Mixture
from swarmgauge.gas.power import strict_exp, strict_log, strict_power
digest = hashlib.sha256()
for exponent in (-1.77, -0.9, 0.33, 2.53):
    digest.update(strict_power(1e-8 * np.cumprod(np.full(3000, 1.01)), exponent).tobytes())
digest.update(strict_exp(np.arange(-60000, 6000) / 97.0).tobytes())
digest.update(strict_log(np.arange(1, 60000) / 97.0).tobytes())
for name in ("nitrogen-phelps1985", "carbon-monoxide-land1978"):
    mixture = Mixture({name: 1.0}, temperature_K=900.0)
    digest.update(json.dumps(mixture.canonical()).encode())
    energy = np.arange(1, 40001) / 3.0
    for process in mixture.acting(mixture.gases[0]):
        digest.update(process.cross_section(energy).tobytes())
print(digest.hexdigest())
"""


def test_same_bits_without_wide_vectors():
    # numpy's own exp, log and pow (and so geomspace) differ between these settings.
    wide = [name for name in __cpu_dispatch__ if __cpu_features__[name]]
    if not wide:
        pytest.skip("this processor has no vector instructions beyond numpy's baseline")
    digests = [
        subprocess.run(
            [sys.executable, "-c", PROGRAM],
            env=os.environ | {"NPY_DISABLE_CPU_FEATURES": " ".join(wide) if disabled else ""},
            capture_output=True,
            text=True,
            check=True,
        ).stdout
        for disabled in (False, True)
    ]
    assert len(digests[0]) == 65
    assert digests[0] == digests[1]
