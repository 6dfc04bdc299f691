"""Faults planted in thresholds and in their order."""

import numpy as np
import pytest

from swarmgauge.gas import load_named
from swarmgauge.gas.audit.audit import check_set


def test_cross_section_below_the_threshold(helium, plant, found):
    assert ("error", "threshold", "triplets") in found(plant(helium, "triplets", threshold_eV=21.5))


def test_a_trace_below_the_threshold_is_a_doubt(helium, plant, found, table):
    law = table((20.6, 0.0), (20.61, 1e-25), (25.0, 1e-21), (100.0, 1.7e-21), (1000.0, 4e-22), beyond=-0.74)
    gas = plant(helium, "electronic-20.62eV", law=law)
    assert ("doubt", "threshold", "electronic-20.62eV") in found(gas)


def test_attachment_below_its_stated_onset(plant, found):
    gas = plant(load_named("oxygen-schmalzried2023"), "attachment", threshold_eV=6.0)
    assert ("doubt", "threshold", "attachment") in found(gas)


def test_first_point_far_above_the_threshold(helium, plant, found):
    assert ("doubt", "threshold", "triplets") in found(plant(helium, "triplets", threshold_eV=1.982))
    assert ("error", "threshold", "ionization") in found(plant(helium, "ionization", threshold_eV=2.4587))


def test_resonances_that_set_in_late_are_a_note(plant, found):
    gas = load_named("nitrogen-phelps1985")  # v2 of nitrogen begins at 1.7 eV, with the resonance
    assert ("note", "threshold", "v2") in found(gas)
    assert ("doubt", "threshold", "v2") in found(plant(gas, "v2", threshold_eV=0.059))


def test_a_step_at_the_threshold(helium, plant, found, table):
    rows = [(20.62, 1e-21), (50.0, 1.6e-21), (100.0, 1.7e-21), (300.0, 1e-21), (1000.0, 4e-22)]
    assert ("note", "threshold", "electronic-20.62eV") in found(
        plant(helium, "electronic-20.62eV", law=table(*rows, beyond=-0.74))
    )


def test_ionization_below_the_first_excitation(helium, plant, found):
    gas = plant(helium, "triplets", threshold_eV=24.9)
    gas = plant(gas, "electronic-20.62eV", threshold_eV=25.0)
    assert ("error", "order of thresholds", "ionization") in found(gas)


def test_excitation_above_the_ionization_energy(helium, add, found):
    law = helium.process("electronic-20.62eV").law
    shifted = type(law)(law.energy_eV + 40.0, 0.1 * law.cross_section_m2, -0.74)
    gas = add(helium, "electronic-20.62eV", id="auto", threshold_eV=60.62, law=shifted)
    assert found(gas) == {("note", "order of thresholds", "auto")}


def test_onset_of_dissociative_attachment(plant, found):
    gas = load_named("oxygen-schmalzried2023")
    assert not [one for one in found(gas) if one[1] == "onset of attachment"]
    law = gas.process("attachment").law
    early = type(law)(law.energy_eV - 2.0, law.cross_section_m2, "zero")
    assert ("doubt", "onset of attachment", "attachment") in found(plant(gas, "attachment", law=early))


def test_attachment_of_carbon_dioxide_begins_too_low():
    # O- from CO2 needs 5.45 - 1.46 = 3.99 eV (dissociation energy, electron affinity; from memory).
    (finding,) = [one for one in check_set(load_named("carbon-dioxide-hayashi1992")) if "attachment" in one.topic]
    assert finding.high_eV == pytest.approx(5.45 - 1.46, abs=0.01)
    assert finding.low_eV < 3.7
    energy = np.array([finding.low_eV, finding.high_eV])
    assert (load_named("carbon-dioxide-hayashi1992").process("attachment").cross_section(energy) > 0.0).all()
