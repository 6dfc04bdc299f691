"""Angular laws against quadrature of the published forms."""

import math
from itertools import pairwise

import numpy as np
import pytest
from scipy import integrate

from swarmgauge.gas import (
    AngleTable,
    Forward,
    Gas,
    Isotropic,
    PowerLaw,
    Process,
    ProcessError,
    Screened,
    ScreenedToRatio,
    Table,
)
from swarmgauge.gas.power import strict_cosine

PARAMETERS = [-0.99, -0.4, -1e-3, 0.0, 1e-5, 0.03, 0.24, 0.26, 0.7, 0.97, 0.99]
ONE = np.array([1.0])


def screened_moment(xi, power):
    """Mean of cos^power of a density proportional to 1 / (1 - xi cos)^2, by scipy quadrature."""
    values = [
        integrate.quad(lambda c, p=p: c**p / (1.0 - xi * c) ** 2, -1, 1, points=[0.99, -0.99], epsabs=1e-13)[0]
        for p in (power, 0)
    ]
    return values[0] / values[1]


def moment(parts, power):
    """Mean of cos or cos^2 over parts of equal probability, (count, 2), cos even in each."""
    low, high = parts[:, 0], parts[:, 1]
    return float(np.mean(0.5 * (low + high) if power == 1 else (low * low + low * high + high * high) / 3.0))


@pytest.mark.parametrize("xi", PARAMETERS)
def test_screened_form_against_quadrature(xi):
    law = Screened([0.0], [xi])
    parts = law.parts(ONE, 32)[0]
    first = screened_moment(xi, 1)
    assert float(law.mean_cosine(ONE)[0]) == pytest.approx(first, abs=1e-10)
    assert moment(parts, 1) == pytest.approx(first, abs=1e-8)
    assert moment(parts, 2) == pytest.approx(screened_moment(xi, 2), abs=1e-3)
    assert parts.min() >= -1.0
    assert parts.max() <= 1.0


@pytest.mark.parametrize("xi", [-0.9, 0.2, 0.5, 0.9, 0.99])
def test_momentum_transfer_of_the_screened_form(xi):
    # Okhrimovskyy, Bogaerts, Gijbels (2002), ratio of momentum transfer to integral cross section, from memory.
    ratio = (1 - xi) / (2 * xi**2) * ((1 + xi) * math.log((1 + xi) / (1 - xi)) - 2 * xi)
    assert 1.0 - float(Screened([0.0], [xi]).mean_cosine(ONE)[0]) == pytest.approx(ratio, rel=1e-9)
    found = ScreenedToRatio([0.0], [ratio])
    np.testing.assert_allclose(found.parts(ONE, 32), Screened([0.0], [xi]).parts(ONE, 32), rtol=0, atol=1e-9)


@pytest.mark.parametrize("xi", [-0.8, 0.5, 0.95])
def test_parts_follow_the_published_sampling(xi):
    # cos = 1 - 2 r (1 - xi) / (1 + xi (1 - 2 r)): the middle of a part lies between the cosines at its ends.
    r = np.linspace(1.0, 0.0, 33)
    ends = 1.0 - 2.0 * r * (1.0 - xi) / (1.0 + xi * (1.0 - 2.0 * r))
    middle = Screened([0.0], [xi]).parts(ONE, 32)[0].mean(axis=1)
    assert (middle > ends[:-1]).all()
    assert (middle < ends[1:]).all()


def test_laws_follow_the_energy():
    law = Screened([1.0, 3.0], [0.0, 0.8])
    assert law.mean_cosine(np.array([0.5, 1.0])).tolist() == [0.0, 0.0]
    for energy, xi in ((2.0, 0.4), (3.0, 0.8), (50.0, 0.8)):
        assert float(law.mean_cosine(np.array(energy))) == pytest.approx(screened_moment(xi, 1), abs=1e-10)
    ratio = ScreenedToRatio([1.0, 3.0], [1.2, 0.4])
    np.testing.assert_allclose(ratio.mean_cosine(np.array([0.0, 2.0, 9.0])), [-0.2, 0.2, 0.6], atol=1e-15)
    np.testing.assert_allclose(
        ratio.parts(np.array([0.0, 2.0, 9.0]), 32).mean(axis=(1, 2)), [-0.2, 0.2, 0.6], atol=1e-9
    )


def table_moment(angles, row, power):
    """By scipy, piece by piece: the shape is linear in angle."""

    def integral(p):
        return sum(
            integrate.quad(
                lambda t: np.interp(t, angles, row) * math.cos(math.radians(t)) ** p * math.sin(math.radians(t)), a, b
            )[0]
            for a, b in pairwise(angles)
        )

    return integral(power) / integral(0)


@pytest.mark.parametrize(
    "row",
    [[5.0, 3.0, 1.0, 0.2, 0.1, 0.4, 2.0], [1e3, 20.0, 2.0, 1.0, 0.5, 0.5, 0.5], [0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 1.0]],
)
def test_table_of_angles_against_quadrature(row):
    angles = [0.0, 10.0, 30.0, 60.0, 90.0, 130.0, 180.0]
    law = AngleTable(angles, [1.0], [row])
    first = table_moment(angles, row, 1)
    assert float(law.mean_cosine(ONE)[0]) == pytest.approx(
        first, abs=1e-4
    )  # 1e-3 is wanted; fine cells of 0.25 degrees
    parts = law.parts(ONE, 32)[0]
    assert moment(parts, 1) == pytest.approx(first, abs=1e-4)
    assert moment(parts, 2) == pytest.approx(table_moment(angles, row, 2), abs=2e-4)


def test_a_flat_table_is_isotropic_whatever_its_scale():
    law = AngleTable([0.0, 45.0, 180.0], [1.0, 2.0], [[1.0, 1.0, 1.0], [7.0, 7.0, 7.0]])
    even = Isotropic().parts(np.array([1.0, 1.5]), 32)
    np.testing.assert_allclose(law.parts(np.array([1.0, 1.5]), 32), even, atol=1e-5)
    assert moment(even[0], 2) == pytest.approx(1.0 / 3.0, abs=1e-12)


def test_between_two_energies_a_table_is_a_mixture_of_shapes():
    law = AngleTable([0.0, 90.0, 180.0], [1.0, 3.0], [[4.0, 1.0, 0.0], [0.0, 1.0, 4.0]])
    assert float(law.mean_cosine(np.array(2.0))) == pytest.approx(0.0, abs=1e-12)
    ends, middle = law.parts(np.array([1.0, 3.0]), 32), law.parts(np.array([2.0]), 32)[0]
    assert moment(middle, 1) == pytest.approx(0.0, abs=1e-12)
    # Second moments mix as the shapes do.
    assert moment(middle, 2) == pytest.approx(0.5 * (moment(ends[0], 2) + moment(ends[1], 2)), abs=2e-4)


def test_cosines():
    degrees = np.linspace(0.0, 180.0, 7201)
    np.testing.assert_allclose(strict_cosine(degrees), np.cos(np.radians(degrees)), rtol=0, atol=1e-15)
    np.testing.assert_allclose(
        1.0 - strict_cosine(np.array([0.01])), 2.0 * math.sin(math.radians(0.005)) ** 2, rtol=1e-7
    )


def elastic(scattering):
    return Process("elastic", "elastic", 0.0, Table([0.0, 10.0], [4e-20, 4e-20], "hold"), scattering=scattering)


def gas_of(elastic_is, *processes):
    return Gas("g", "X", 4.0, elastic_is, processes)


def test_an_angular_law_never_counts_angles_twice():
    law = Screened([0.0], [0.5])
    with pytest.raises(ProcessError, match="counts the angles already"):
        gas_of("momentum_transfer", elastic(law))
    with pytest.raises(ProcessError, match="stands for isotropic scattering"):
        gas_of("total_momentum_transfer", elastic(law))
    excitation = Process("x", "excitation", 1.0, PowerLaw(1e-20, 0.0), scattering=Forward())
    with pytest.raises(ProcessError, match="process x: scattering is not isotropic"):
        gas_of("total_momentum_transfer", elastic(Isotropic()), excitation)
    with pytest.raises(ProcessError, match="Remove convert"):
        gas_of("integral", elastic(Screened([0.0], [0.5], convert=True)))
    assert gas_of("momentum_transfer", elastic(Isotropic()), excitation).warnings == ()
    assert gas_of("integral", elastic(law)).warnings == ()
    assert "isotropic here" in gas_of("integral", elastic(Isotropic())).warnings[0]


def test_a_momentum_transfer_is_converted_where_the_law_says_so():
    law = ScreenedToRatio([0.0, 10.0], [1.0, 0.5], convert=True)
    gas = gas_of("momentum_transfer", elastic(law))
    energy = np.array([0.0, 5.0, 10.0])
    np.testing.assert_allclose(gas.process("elastic").cross_section(energy), [4e-20, 4e-20 / 0.75, 8e-20], rtol=1e-14)


@pytest.mark.parametrize(
    ("make", "message"),
    [
        (lambda: Screened([0.0, 1.0], [0.5]), "screened: energy_eV has 2 and parameter 1 entries"),
        (lambda: Screened([1.0, 1.0], [0.5, 0.5]), "energy_eV, row 2: 1 is not a rising energy"),
        (lambda: Screened([0.0], [float("nan")]), "parameter, row 1: nan is not between"),
        (lambda: AngleTable([0, 180], [1.0], [[0.0, 0.0]]), "shape is zero in row 1"),
        (lambda: AngleTable([0, 180], [1.0, 2.0], [[1.0, 1.0], [1.0]]), "rows of shape differ in length"),
        (lambda: AngleTable([0, 180], [1.0], [[1.0, -1.0]]), "shape, row 1, angle 180: -1 is not possible"),
        (lambda: elastic(Forward()), 'scattering = "forward" for an elastic process: it would do nothing'),
        (
            lambda: Process("a", "attachment", 0.0, PowerLaw(1e-20, 0.0), scattering=Forward()),
            "scattering is given for an attachment process",
        ),
        (
            lambda: Process("i", "ionization", 9.0, PowerLaw(1e-20, 0.0), scattering=Forward(), ejecta="binary"),
            'scattering is given beside ejecta = "binary"',
        ),
        (lambda: Process("i", "ionization", 9.0, PowerLaw(1e-20, 0.0), ejecta="both"), 'ejecta = "both" is unknown'),
    ],
)
def test_impossible_laws_are_refused(make, message):
    with pytest.raises(ProcessError, match=message):
        make()
