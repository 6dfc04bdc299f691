"""Reference values against other tables, and faults planted in masses, energies and units."""

from dataclasses import replace

import periodictable
import pytest

from swarmgauge.gas import Table, load_named
from swarmgauge.gas.audit.reference import (
    ATOMIC_LEVEL_EV,
    ATOMIC_WEIGHT,
    ATTACHMENT_ONSET_EV,
    ELECTRONIC_EV,
    IONIZATION_EV,
    ORBITALS,
    VIBRATION_EV,
    elements,
    molar_mass,
)

BOHR2 = 0.529177e-10**2


@pytest.mark.parametrize("element", ATOMIC_WEIGHT)
def test_atomic_weights(element):
    # against the table of the periodictable package; argon became 39.95 in 2017, from 39.948
    assert ATOMIC_WEIGHT[element] == pytest.approx(getattr(periodictable, element).mass, rel=1e-4)


def test_ionization_energies_of_atoms():
    mendeleev = pytest.importorskip("mendeleev", reason="a large package, not among the tests' requirements")
    for atom in set(IONIZATION_EV) & set(ATOMIC_WEIGHT):
        assert IONIZATION_EV[atom] == pytest.approx(mendeleev.element(atom).ionenergies[1], abs=1e-4)


# CRC Handbook of Chemistry and Physics, ionization energies of gas-phase molecules, eV, from memory.
HANDBOOK_EV = {"H2": 15.426, "N2": 15.581, "O2": 12.070, "CO": 14.014, "CO2": 13.773, "H2O": 12.621, "CH4": 12.61}


@pytest.mark.parametrize("molecule", HANDBOOK_EV)
def test_ionization_energies_of_molecules(molecule):
    assert IONIZATION_EV[molecule] == pytest.approx(HANDBOOK_EV[molecule], abs=0.01)


def test_levels_in_wave_numbers():
    # 1/cm, G. Herzberg, Molecular Spectra and Molecular Structure, from memory; hc = 1.239842e-4 eV cm (CODATA).
    for molecule, wave_number in {"H2": 4161, "N2": 2330, "O2": 1556, "CO": 2143, "CO2": 667, "H2O": 1595}.items():
        assert VIBRATION_EV[molecule] == pytest.approx(wave_number * 1.239842e-4, rel=1e-3)
    assert ELECTRONIC_EV["O2"] == pytest.approx(7882 * 1.239842e-4, abs=0.001)


def test_onsets_follow_from_bond_and_affinity():
    # Bond energies D0 5.116 (O2) and 4.478 eV (H2), electron affinities 1.461 (O) and 0.754 eV (H), from memory.
    assert ATTACHMENT_ONSET_EV["O2"] == pytest.approx(5.116 - 1.461, abs=0.01)
    assert ATTACHMENT_ONSET_EV["H2"] == pytest.approx(4.478 - 0.754, abs=0.01)


def test_tables_agree_with_each_other():
    for formula in {*IONIZATION_EV, *VIBRATION_EV, *ATTACHMENT_ONSET_EV, *ORBITALS}:
        assert elements(formula) is not None, formula
    for atom, level in ATOMIC_LEVEL_EV.items():
        assert level < IONIZATION_EV[atom]
    for formula, orbitals in ORBITALS.items():
        # vertical energies of B lie at or somewhat above the adiabatic ionization energy; argon 15.82, methane 14.25
        assert -1e-3 < min(orbital.B for orbital in orbitals) / IONIZATION_EV[formula] - 1.0 < 0.14


def test_formulas():
    assert elements("CO2") == {"C": 1, "O": 2}
    assert elements("C2H4O") == {"C": 2, "H": 4, "O": 1}
    assert elements("SF6") == {"S": 1, "F": 6}
    assert elements("X") is elements("co2") is elements("O2+") is elements("") is None
    assert molar_mass("SF6") == pytest.approx(146.05, abs=0.01)  # IUPAC; from memory
    assert molar_mass("X") is None


def test_molar_mass(helium, found):
    assert found(replace(helium, molar_mass_g_per_mol=4.01)) == {("doubt", "molar mass", "")}
    assert found(replace(helium, molar_mass_g_per_mol=8.005)) == {("error", "molar mass", "")}
    assert ("note", "reference values", "") in found(replace(helium, formula="X"))


def test_ionization_energy(helium, plant, found):
    assert ("doubt", "ionization energy", "ionization") in found(plant(helium, "ionization", threshold_eV=24.2))
    law = helium.process("ionization").law
    halved = Table(0.5 * law.energy_eV, law.cross_section_m2, law.beyond)
    gas = plant(helium, "ionization", threshold_eV=12.29, law=halved)
    assert ("error", "ionization energy", "ionization") in found(gas)


def test_ionization_threshold_in_another_unit(helium, plant, found):
    law = helium.process("ionization").law
    kilojoule = Table(96.485 * law.energy_eV, law.cross_section_m2, law.beyond)
    gas = plant(
        replace(helium, formula="CF4", molar_mass_g_per_mol=88.0), "ionization", threshold_eV=2372.0, law=kilojoule
    )
    assert ("error", "ionization energy", "ionization") in found(gas)


def test_first_level_of_an_atom(helium, plant, found):
    law = helium.process("triplets").law
    later = Table(law.energy_eV + 0.5, law.cross_section_m2, law.beyond)
    assert found(plant(helium, "triplets", threshold_eV=20.32, law=later)) == {("doubt", "first level", "triplets")}
    without = replace(helium, published=tuple(p for p in helium.published if p.kind != "excitation"))
    assert found(without) == set()  # nothing to compare


def test_levels_of_a_molecule(found):
    oxygen = load_named("oxygen-schmalzried2023")
    without = replace(oxygen, published=tuple(p for p in oxygen.published if not p.id.startswith(("v1", "v2"))))
    assert ("doubt", "vibrational quantum", "") in found(without)
    without = replace(oxygen, published=tuple(p for p in oxygen.published if not 0.8 < p.threshold_eV < 1.3))
    assert ("doubt", "first electronic level", "") in found(without)
    assert ("note", "first electronic level", "a3pi") in found(load_named("carbon-monoxide-land1978"))


@pytest.mark.parametrize(("unit", "factor"), [("1e-16 cm2", 1e20), ("bohr2", 1.0 / BOHR2), ("cm2", 1e4)])
def test_cross_sections_in_another_unit(helium, unit, factor):
    from swarmgauge.gas.audit.magnitude import check_magnitude

    published = [
        replace(p, law=Table(p.law.energy_eV, factor * p.law.cross_section_m2, p.law.beyond)) for p in helium.published
    ]
    findings = list(check_magnitude(replace(helium, published=tuple(published))))
    assert {one.grade for one in findings} == {"error"}
    assert "elastic" in {one.process for one in findings}
    assert all(unit in one.reason for one in findings if one.process == "elastic")


def test_one_excitation_in_another_unit(helium, plant, found):
    law = helium.process("triplets").law
    in_cm2 = Table(law.energy_eV, 1e4 * law.cross_section_m2, law.beyond)
    assert found(plant(helium, "triplets", law=in_cm2)) == {("error", "unit", "triplets")}


def test_too_small_cross_sections(helium, plant, found):
    law = helium.process("elastic").law
    small = Table(law.energy_eV, 1e-4 * law.cross_section_m2, law.beyond)
    assert ("error", "unit", "elastic") in found(plant(helium, "elastic", law=small))


def test_three_body_cross_section_in_cm5(plant, found):
    oxygen = load_named("oxygen-lawton1978")
    law = oxygen.process("attachment-3body").law
    in_cm5 = Table(law.energy_eV, 1e10 * law.cross_section_m2, law.beyond)
    assert ("error", "unit", "attachment-3body") in found(plant(oxygen, "attachment-3body", law=in_cm5))


def test_ratio_of_bohr2_is_recognised(helium, plant):
    from swarmgauge.gas.audit.beb import check_beb

    law = helium.process("ionization").law
    for factor, words in ((1e-20 / BOHR2, "bohr2 taken as 1e-20 m2"), (BOHR2 / 1e-20, "1e-20 m2 converted as bohr2")):
        slipped = Table(law.energy_eV, factor * law.cross_section_m2, law.beyond)
        (finding,) = check_beb(plant(helium, "ionization", law=slipped))
        assert finding.grade == "error"
        assert words in finding.reason
