"""Constants against scipy's table, which may follow a later adjustment than 2018."""

import numpy as np
import pytest
import scipy.constants
import scipy.special

from swarmgauge.gas import constants


@pytest.mark.parametrize(
    ("name", "value"),
    [
        ("E_CHARGE", scipy.constants.e),
        ("BOLTZMANN", scipy.constants.k),
        ("E_MASS", scipy.constants.m_e),
        ("ATOMIC_MASS", scipy.constants.atomic_mass),
    ],
)
def test_constants(name, value):
    assert getattr(constants, name) == pytest.approx(value, rel=2e-9)


def test_derived():
    # 593097 m/s: electron of 1 eV; 1 Td = 1e-21 V m^2: definition.
    assert abs(constants.SPEED_1_EV - 593097) < 1
    assert constants.TOWNSEND == 1e-21


def test_gauss_points():
    np.testing.assert_allclose(np.transpose(constants.GAUSS_LEGENDRE), scipy.special.roots_legendre(4), rtol=1e-15)
