"""Units of columns against CODATA."""

import numpy as np
import pytest
from scipy import constants

from swarmgauge.gas import InputError
from swarmgauge.gas.columns.units import AREA_M2, ENERGY_EV, THREE_BODY_M5, converted, factor

EV = constants.electron_volt


@pytest.mark.parametrize(
    ("unit", "joule"),
    [
        ("eV", EV),
        ("meV", 1e-3 * EV),
        ("keV", 1e3 * EV),
        ("J", 1.0),
        ("kJ/mol", 1e3 / constants.Avogadro),
        ("K", constants.Boltzmann),
        ("1/cm", 100.0 * constants.h * constants.c),
        ("Ry", constants.Rydberg * constants.h * constants.c),
        ("hartree", constants.physical_constants["Hartree energy"][0]),
    ],
)
def test_energies(unit, joule):
    assert ENERGY_EV[unit] == pytest.approx(joule / EV, rel=1e-9)


@pytest.mark.parametrize(
    ("unit", "m2"),
    [
        ("m2", 1.0),
        ("cm2", 1e-4),
        ("cm^2", 1e-4),
        ("1e-16cm2", 1e-20),
        ("1e-16 cm2", 1e-20),
        ("1E-20m2", 1e-20),
        ("angstrom2", constants.angstrom**2),
        ("bohr2", constants.physical_constants["Bohr radius"][0] ** 2),
        ("pi_bohr2", np.pi * constants.physical_constants["Bohr radius"][0] ** 2),
        ("barn", 1e-28),
        ("Mb", 1e-22),
    ],
)
def test_areas(unit, m2):
    assert factor(unit, AREA_M2) == pytest.approx(m2, rel=2e-9)


def test_every_unit_is_tested():
    tested = {case[0] for test in (test_energies, test_areas) for mark in test.pytestmark for case in mark.args[1]}
    assert {*ENERGY_EV, *AREA_M2} <= tested


def test_three_bodies():
    assert factor("cm5", THREE_BODY_M5) == 1e-10


def test_decimals_stay_as_on_paper():
    values = np.array([2.5, 0.58, 7.3, 0.0, 1.1e-3])
    assert converted(values, "1e-20m2", AREA_M2) == [2.5e-20, 0.58e-20, 7.3e-20, 0.0, 1.1e-23]
    assert converted(values, "1e-16cm2", AREA_M2) == [2.5e-20, 0.58e-20, 7.3e-20, 0.0, 1.1e-23]


@pytest.mark.parametrize("unit", ["", "m", "bohr", "1e-16", "-1 m2", "0 m2", "1e-16 1e-4 m2", "cm2/sr", "EV"])
def test_no_units(unit):
    with pytest.raises(InputError, match="Known units: m2, cm2"):
        factor(unit, AREA_M2)
