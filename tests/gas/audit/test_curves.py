"""Faults planted in the course of curves: gaps, slips, holes, doubles, coarse grids, ends and slopes."""

from dataclasses import replace

import numpy as np
import pytest

from swarmgauge.gas import Process, Table, load_named
from swarmgauge.gas.audit.grid import rate_differences
from swarmgauge.gas.audit.slopes import dipole_slope, slope_between


def without_rows(law, low, high):
    keep = (law.energy_eV < low) | (law.energy_eV > high)
    return Table(law.energy_eV[keep], law.cross_section_m2[keep], law.beyond)


def test_a_gap(helium, plant, found):
    law = without_rows(helium.process("ionization").law, 250.0, 2500.0)
    assert ("doubt", "gap", "ionization") in found(plant(helium, "ionization", law=law))


def test_elastic_that_starts_late(helium, plant, found):
    law = without_rows(helium.process("elastic").law, -1.0, 0.4)
    assert ("doubt", "gap", "elastic") in found(plant(helium, "elastic", law=law))


@pytest.mark.parametrize("factor", [10.0, 0.1])
def test_a_slipped_digit(helium, plant, found, factor):
    law = helium.process("ionization").law
    section = np.where(np.arange(len(law.energy_eV)) == 60, factor, 1.0) * law.cross_section_m2
    gas = plant(helium, "ionization", law=Table(law.energy_eV, section, law.beyond))
    assert ("doubt", "jump", "ionization") in found(gas)


def test_a_hole(helium, plant, found):
    law = helium.process("ionization").law
    section = np.where(np.arange(len(law.energy_eV)) == 60, 0.0, law.cross_section_m2)
    gas = plant(helium, "ionization", law=Table(law.energy_eV, section, law.beyond))
    assert ("doubt", "jump", "ionization") in found(gas)


def test_separate_peaks_are_a_note(found):
    topics = {one for one in found(load_named("oxygen-lawton1978")) if one[1] == "jump"}
    assert {grade for grade, _, _ in topics} == {"note"}


def test_the_same_process_twice(helium, add, found):
    assert ("error", "duplicate", "again") in found(add(helium, "triplets", id="again"))


def test_a_proportional_process(helium, add, found):
    law = helium.process("triplets").law
    half = Table(law.energy_eV, 0.5 * law.cross_section_m2, law.beyond)
    assert found(add(helium, "triplets", id="half", law=half)) == {("doubt", "duplicate", "half")}
    assert found(add(helium, "triplets", id="half", law=half, passive=True)) <= {("doubt", "total and sum", "half")}


def test_proportional_with_another_threshold(helium, add, found):
    law = helium.process("triplets").law
    half = Table(law.energy_eV, 0.5 * law.cross_section_m2, law.beyond)
    # the later one of the two is named
    assert ("note", "duplicate", "triplets") in found(add(helium, "triplets", id="half", law=half, threshold_eV=19.0))


def test_a_coarse_grid(helium, plant, found):
    law = helium.process("triplets").law
    assert ("doubt", "grid", "triplets") in found(
        plant(helium, "triplets", law=Table(law.energy_eV[::4], law.cross_section_m2[::4], law.beyond))
    )


def test_estimated_error_of_a_rate():
    # Cross section (E - 10)^2 from 10 to 40 eV, read linearly at steps of 2 eV: the exact error of the rate integral
    # at kT = 3 eV by quadrature on 30000 points.
    energy = np.arange(10.0, 41.0, 2.0)
    law = Table(energy, 1e-22 * (energy - 10.0) ** 2, "zero")
    temperature, change, _ = rate_differences(Process("x", "excitation", 10.0, law), law)
    fine = np.linspace(10.0, 40.0, 30001)
    weight = fine * np.exp(-fine / 3.0)
    exact = np.trapezoid(weight * 1e-22 * (fine - 10.0) ** 2, fine) / np.trapezoid(weight * law.value(fine), fine) - 1.0
    assert exact < -0.01
    assert np.interp(3.0, temperature, change) == pytest.approx(exact, rel=0.5)


def test_straight_lines_have_no_error():
    law = Table(np.array([1.0, 2.0, 4.0, 5.0, 8.0]), 1e-20 * np.array([0.0, 1.0, 3.0, 4.0, 7.0]), "zero")
    _, change, parts = rate_differences(Process("x", "excitation", 1.0, law), law)
    assert np.abs(change).max() < 1e-12
    assert parts.shape[1] == 4


def test_a_cliff_at_the_end(helium, plant, found):
    law = replace(helium.process("ionization").law, beyond="zero")
    assert ("doubt", "end of table", "ionization") in found(plant(helium, "ionization", law=law))
    law = replace(helium.process("ionization").law, beyond="hold")
    assert ("doubt", "end of table", "ionization") in found(plant(helium, "ionization", law=law))


def power_tail(law, from_eV, exponent):
    ratio = np.maximum(law.energy_eV / from_eV, 1.0)
    section = np.where(ratio > 1.0, law.value(np.array([from_eV]))[0] * ratio**exponent, law.cross_section_m2)
    return Table(law.energy_eV, section, exponent)


@pytest.mark.parametrize(("process", "exponent"), [("ionization", -1.3), ("ionization", -0.4), ("triplets", -5.0)])
def test_a_slope_that_cannot_be(helium, plant, found, process, exponent):
    law = helium.process(process).law
    if process == "triplets":  # ends at 10 thresholds only after its table is drawn out
        energy = np.append(law.energy_eV, [300.0, 500.0])
        law = Table(energy, np.append(law.cross_section_m2, law.value(energy[-2:])), -3.0)
    gas = plant(helium, process, law=power_tail(law, 200.0, exponent))
    assert ("doubt", "high-energy slope", process) in found(gas)


def test_a_power_beyond_that_cannot_be(helium, plant, found):
    law = replace(helium.process("electronic-20.62eV").law, beyond=-0.3)
    assert found(plant(helium, "electronic-20.62eV", law=law)) == {("doubt", "high-energy slope", "electronic-20.62eV")}


def test_slope_of_a_dipole_transition():
    energy = np.array([999.0, 1001.0])
    exact = np.diff(np.log(np.log(energy / 20.0) / energy)) / np.diff(np.log(energy))
    assert dipole_slope(1000.0 / 20.0) == pytest.approx(exact[0], abs=1e-5)


def test_slope_of_a_sum(helium):
    ionization = helium.process("ionization")
    assert slope_between([ionization, ionization], 2e4, 4e4) == pytest.approx(-0.86, abs=1e-9)
    assert np.isnan(slope_between([ionization], 10.0, 100.0))
