"""The binary-encounter-Bethe formula, and ionization that departs from it."""

import numpy as np
import pytest

from swarmgauge.gas import Table, load_named
from swarmgauge.gas.audit.beb import beb_cross_section, check_beb
from swarmgauge.gas.audit.reference import ORBITALS


def test_formula_at_one_energy():
    # Hydrogen atom at 4 R, by hand: t = 4, u = 1, 4 pi a0^2 = 3.5189e-20 m2, ln 4 = 1.386294;
    # 1/6 [1.386294/2 x 15/16 + 3/4 - 1.386294/5] = 0.187094. Y.-K. Kim and M. E. Rudd (1994), eq. (57).
    assert beb_cross_section(np.array([4 * 13.6057]), ORBITALS["H"])[0] == pytest.approx(
        3.5189e-20 * 0.187094, rel=1e-4
    )


def test_zero_below_the_binding_energy():
    assert beb_cross_section(np.array([1.0, 24.5]), ORBITALS["He"]).tolist() == [0.0, 0.0]


# Largest cross sections, 1e-20 m2: D. Rapp and P. Englander-Golden, J. Chem. Phys. 43, 1464 (1965); water and methane:
# B. G. Lindsay and M. A. Mangan, Landolt-Boernstein I/17C (2003). From memory. The formula is good to some 15 %.
PEAKS = {"H2": 0.97, "He": 0.37, "Ar": 2.86, "N2": 2.51, "O2": 2.71, "CO": 2.64, "CO2": 3.55, "H2O": 2.1, "CH4": 3.6}


@pytest.mark.parametrize("formula", PEAKS)
def test_peaks(formula):
    energy = np.geomspace(30.0, 500.0, 300)
    section = beb_cross_section(energy, ORBITALS[formula])
    assert section.max() == pytest.approx(PEAKS[formula] * 1e-20, rel=0.15)
    assert 60.0 < energy[np.argmax(section)] < 130.0


def test_falls_as_a_dipole_transition():
    # H. Bethe (1930): the cross section times energy grows as the logarithm of energy; a straight line in ln E.
    energy = np.array([2e3, 2e4, 2e5])
    product = energy * beb_cross_section(energy, ORBITALS["H"])
    assert product[2] - product[1] == pytest.approx(product[1] - product[0], rel=0.02)
    # the factor of ln E: 4 pi a0^2 R^2 / B x 1/2
    assert (product[2] - product[1]) / np.log(10.0) == pytest.approx(0.5 * 3.5189e-20 * 13.6057, rel=0.01)


def test_ionization_scaled_by_a_third(helium, plant):
    law = helium.process("ionization").law
    (finding,) = check_beb(plant(helium, "ionization", law=Table(law.energy_eV, 0.66 * law.cross_section_m2, -0.86)))
    assert finding.grade == "doubt"
    assert "0.66 times the formula" in finding.reason


@pytest.mark.parametrize("name", ["nitrogen-phelps1985", "oxygen-lawton1978", "carbon-dioxide-hayashi1992"])
def test_sums_of_ionization_pass(name):
    assert list(check_beb(load_named(name))) == []


def test_one_part_missing_is_seen(plant):
    gas = load_named("nitrogen-phelps1985")
    assert list(check_beb(plant(gas, "ionization", passive=True)))
