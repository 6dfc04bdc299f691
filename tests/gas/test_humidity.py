"""Vapour pressure of water against tables."""

import pytest

import swarmgauge as sg
from swarmgauge.gas import MixtureError, saturation_pressure_Pa, water_fraction

# Liquid: steam tables of the IAPWS-95 formulation (W. Wagner and A. Pruss, J. Phys. Chem. Ref. Data 31, 387 (2002),
# table of saturation), from memory, to the digits given. Ice at 230 K: check value of the IAPWS release R14-08 (2011),
# from memory. The boiling point at 101325 Pa is 373.124 K.
TABLE = [
    (230.0, 8.94735, 1e-5),
    (273.16, 611.657, 1e-5),
    (293.15, 2339.3, 1e-4),
    (298.15, 3169.9, 1e-4),
    (323.15, 12352.0, 1e-4),
    (373.124, 101325.0, 1e-4),
    (473.15, 1.5549e6, 1e-4),
    (573.15, 8.5879e6, 1e-4),
    (647.096, 22.064e6, 1e-9),
]


@pytest.mark.parametrize(("temperature", "pressure", "precision"), TABLE)
def test_saturation_pressure(temperature, pressure, precision):
    assert saturation_pressure_Pa(temperature) == pytest.approx(pressure, rel=precision)


def test_ice_and_liquid_meet_at_the_triple_point():
    below, above = saturation_pressure_Pa(273.159999), saturation_pressure_Pa(273.16)
    assert below == pytest.approx(above, rel=2e-6)
    # Clausius and Clapeyron: d ln p / dT = L / (R T^2), the latent heat of ice being larger by that of melting, 6.01
    # kJ/mol, than that of the liquid, 45.05 kJ/mol (handbook values, from memory).
    for sign, latent in ((-1, 51060.0), (1, 45050.0)):
        near, far = (saturation_pressure_Pa(273.16 + sign * step) for step in (0.0, 0.1))
        slope = (far - near) / (sign * 0.1 * near)
        assert slope == pytest.approx(latent / (8.314463 * 273.16**2), rel=6e-3)


def test_water_fraction():
    assert water_fraction(0.5, 293.15, 101325.0) == pytest.approx(0.5 * 2339.3 / 101325.0, rel=1e-4)
    assert water_fraction(0.0, 293.15, 1e5) == 0.0
    assert sg.water_fraction(1.0, 373.0, 101325.0) == pytest.approx(0.9956, rel=1e-3)


FAULTS = [
    ((50.0, 293.15, 1e5), "relative_humidity = 50 is outside 0 to 1. If per cent was meant, divide by 100"),
    ((-0.1, 293.15, 1e5), "relative_humidity = -0.1 is outside 0 to 1"),
    ((float("nan"), 293.15, 1e5), "relative_humidity = nan is outside 0 to 1"),
    ((0.5, 20.0, 1e5), "temperature_K = 20: the vapour pressure of water is known from 50 to 647.096 K"),
    ((0.5, 700.0, 1e5), "temperature_K = 700: the vapour pressure"),
    ((0.5, 293.15, 0.0), "pressure_Pa = 0 is not possible"),
    ((1.0, 400.0, 1e5), "the water vapour alone has 2.4.*e.05 Pa, more than pressure_Pa = 100000. Lower"),
]


@pytest.mark.parametrize(("given", "message"), FAULTS)
def test_impossible_humidity_is_refused(given, message):
    with pytest.raises(MixtureError, match=message):
        water_fraction(*given)
