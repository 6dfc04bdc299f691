"""Reading a computed curve between its points."""

import math

import numpy as np
import pytest

from swarmgauge.gauge.interpolation import on_curve

FIELDS = np.array([10.0, 17.8, 31.6, 56.2, 100.0, 178.0, 316.0])


def test_a_point_is_read_as_it_is():
    found = on_curve(FIELDS, 3.0 * FIELDS, 0.1 * FIELDS, 31.6)
    assert (found.value, found.standard_error, found.interpolation_error) == (3.0 * 31.6, pytest.approx(3.16), 0.0)


@pytest.mark.parametrize("at", [11.0, 40.0, 250.0])
def test_power_laws_are_exact(at):
    found = on_curve(FIELDS, 2.0 * FIELDS**1.7, 0.01 * FIELDS**1.7, at)
    assert found.value == pytest.approx(2.0 * at**1.7, rel=1e-12)
    assert found.interpolation_error < 1e-10 * found.value
    # weights of several points: about the error of one, and never that of none
    assert 0.6 < found.standard_error / (0.01 * at**1.7) < 1.3


def ionization(field):
    """Like an ionization coefficient: J. S. Townsend's exp(-B N/E)."""
    return 1e-20 * np.exp(-800.0 / field)


def drift_through_zero(field):
    return 1e-17 * (field / 100.0 - 1.0)


@pytest.mark.parametrize("curve", [ionization, drift_through_zero, lambda x: 5.0 + np.sin(np.log(x))])
def test_the_booked_error_is_one_of_standard_size(curve):
    ratios = []
    for at in np.geomspace(10.5, 300.0, 101):
        found = on_curve(FIELDS, curve(FIELDS), 0.0 * FIELDS, at)
        assert found.standard_error == 0.0
        ratios.append(abs(found.value - curve(at)) / found.interpolation_error)
    # what is missed counts as one standard error: seldom above it, never above twice, and not booked many times over
    assert 0.05 < np.sqrt(np.mean(np.square(ratios))) < 1.0
    assert max(ratios) < 2.0


def test_errors_pass_as_those_of_a_straight_sum():
    # cubic through four points on an even logarithmic grid, in the middle: weights -1/16, 9/16, 9/16, -1/16 (common
    # practice); relative errors add in quadrature
    fields = np.array([1.0, 2.0, 4.0, 8.0])
    found = on_curve(fields, np.ones(4), np.array([0.16, 0.16, 0.0, 0.0]), math.sqrt(8.0))
    assert found.standard_error == pytest.approx(0.16 * math.hypot(1 / 16, 9 / 16), rel=1e-12)


@pytest.mark.parametrize(
    ("fields", "at", "words"),
    [
        ([], 10.0, "no point of the campaign has a value"),
        ([10.0, 20.0, 30.0], 9.0, "from 10 to 30 Td only"),
        ([10.0, 20.0, 30.0], 31.0, "from 10 to 30 Td only"),
        ([10.0, 30.0], 20.0, "fewer than three computed fields"),
        ([0.0, 10.0, 30.0], 20.0, "fewer than three computed fields"),
        ([0.0, 10.0, 20.0, 30.0], 5.0, "between no field and"),
    ],
)
def test_where_it_cannot_be_read(fields, at, words):
    fields = np.array(fields)
    found = on_curve(fields, np.ones(len(fields)), np.ones(len(fields)), at)
    assert isinstance(found, str)
    assert words in found
