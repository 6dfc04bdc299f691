"""Units of papers on swarms against CODATA and handbook numbers."""

import math

import pytest
from scipy import constants

from swarmgauge.campaign.units import UnitError, factor_to, parse_unit


@pytest.mark.parametrize(
    ("unit", "temperature", "factor"),
    [
        # Handbooks and papers on swarms print these factors, to the digits given (common practice).
        ("V/(cm Torr) at 0 C", None, 2.829),
        ("V/(cm Torr)", 293.15, 3.036),
        ("V/(cm Torr)", 300.0, 3.107),
        ("V cm-1 Torr-1", 300.0, 3.107),
        ("V/cm/Torr", 300.0, 3.107),
        ("V/(cm mmHg)", 293.0, 3.034),
        ("1e-17 V cm2", None, 1.0),
        ("10^-17 V cm^2", None, 1.0),
        ("V m2", None, 1e21),
        ("mTd", None, 1e-3),
    ],
)
def test_reduced_fields(unit, temperature, factor):
    assert factor_to(unit, "Td", temperature) == pytest.approx(factor, rel=3e-4)


def test_pressures_are_densities_by_codata():
    density = constants.torr / (constants.k * 293.15)
    assert factor_to("1/(cm Torr)", "m^2", 293.15) == pytest.approx(100.0 / density, rel=1e-12)
    assert factor_to("cm2 Torr/s", "1/(m s)", 293.15) == pytest.approx(1e-4 * density, rel=1e-12)
    loschmidt, pressure = constants.physical_constants["Loschmidt constant (273.15 K, 101.325 kPa)"][0], 101325.0
    assert factor_to("cm2/(V s)", "1/(m V s)", 273.15, pressure) == pytest.approx(1e-4 * loschmidt, rel=1e-9)
    assert factor_to("1/cm", "m^2", 273.15, pressure) == pytest.approx(100.0 / loschmidt, rel=1e-9)
    assert factor_to("mmHg", "Torr", 300.0) == pytest.approx(1.0, abs=2e-7)
    assert factor_to("atm", "mbar", 300.0) == pytest.approx(1013.25, rel=1e-12)


@pytest.mark.parametrize(
    ("unit", "wanted", "factor"),
    [
        ("cm/s", "m/s", 1e-2),
        ("cm/us", "m/s", 1e4),
        ("cm3/s", "m^3/s", 1e-6),
        ("cm^6 s^-1", "m^6/s", 1e-12),
        ("1e-20 m2", "m^2", 1e-20),
        ("1e24 1/(m s)", "1/(m s)", 1e24),
        ("V", "eV", 1.0),
        ("J", "eV", 1.0 / constants.e),
        ("1", "1", 1.0),
    ],
)
def test_other_units(unit, wanted, factor):
    assert factor_to(unit, wanted, None) == pytest.approx(factor, rel=1e-14)


def test_thermal_energy_is_a_unit():
    # L. G. H. Huxley and R. W. Crompton (1974): Townsend's energy factor k1 = (D/mu) / (kT/e).
    assert factor_to("kT/e", "eV", 288.15) == pytest.approx(constants.k * 288.15 / constants.e, rel=1e-14)


@pytest.mark.parametrize(
    ("unit", "wanted", "words"),
    [
        ("V/(cm Torr)", "Td", "Was the gas at room temperature, or the pressure reduced to 0 C? Give temperature_K"),
        ("V/cm Torr", "Td", "does the stroke cover what follows?"),
        ("1e-17 V (cm2", "Td", "brackets or strokes do not match"),
        ("m//s", "m/s", "brackets or strokes do not match"),
        ("m/s)", "m/s", "brackets or strokes do not match"),
        ("m/", "m/s", "brackets or strokes do not match"),
        ("", "m/s", "is empty"),
        ("furlong/s", "m/s", "furlong is unknown"),
        ("torr", "Torr", "Did you mean Torr?"),
        ("m/s", "Td", "is none of this quantity, which is in Td"),
        ("cm2/s", "1/(m s)", "only with the density of the gas. Give temperature_K and pressure_Pa"),
        ("V/(cm Torr) at -300 C", "Td", "has no density"),
        ("5 & 3", "Td", "is not understood"),
        ("cm22/s", "m/s", "is not understood"),
        ("m/s at 1.2.3 K", "m/s", "is not understood"),
        ("10^-999 m/s", "m/s", "no place among numbers"),
    ],
)
def test_what_is_unclear_is_refused(unit, wanted, words):
    with pytest.raises(UnitError) as refusal:
        factor_to(unit, wanted, None)
    assert words in str(refusal.value)


def test_density_by_the_pressure_of_the_row_is_that_of_its_temperature():
    assert parse_unit("Torr", 273.15).factor / parse_unit("Torr", 546.3).factor == pytest.approx(2.0)
    assert math.isclose(parse_unit("kV/(cm bar)", 293.15).factor / 1e-21, 4.047, rel_tol=1e-4)  # 24.7 of them: 100 Td
