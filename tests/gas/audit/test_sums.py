"""Faults planted in totals and elastic parts."""

from dataclasses import replace

from swarmgauge.gas import Table, load_named
from swarmgauge.gas.audit.audit import check_set


def scaled(law, factor):
    return Table(law.energy_eV, factor * law.cross_section_m2, law.beyond)


def test_no_elastic_process(helium, found):
    without = replace(helium, published=tuple(p for p in helium.published if p.kind != "elastic"))
    assert found(without) == {("note", "elastic", "")}


def test_losses_above_the_total(plant):
    gas = load_named("nitrogen-phelps1985")
    (sound,) = [one for one in check_set(gas) if one.topic == "elastic part of the total"]
    assert sound.grade == "doubt"  # above 1.3 keV, where no swarm is
    assert sound.low_eV > 1000.0
    gas = plant(gas, "elastic", law=scaled(gas.published[0].law, 0.2))
    (finding,) = [one for one in check_set(gas) if one.topic == "elastic part of the total"]
    assert finding.grade == "error"
    assert finding.low_eV < 100.0


def test_a_total_that_is_no_sum(plant, found):
    gas = load_named("nitrogen-phelps1985")
    parts = [p for p in gas.processes if p.kind == "ionization"]
    energy = parts[0].law.energy_eV
    section = parts[0].cross_section(energy) + parts[1].cross_section(energy)

    def with_total(factor):
        total = replace(parts[0], id="all", law=Table(energy, factor * section, "zero"), passive=True)
        return {one for one in found(replace(gas, published=(*gas.published, total))) if one[1] == "total and sum"}

    assert with_total(1.0) == set()
    assert with_total(1.2) == with_total(0.93) == {("doubt", "total and sum", "all")}


def test_a_passive_part_is_no_total(found, add, helium):
    law = scaled(helium.process("ionization").law, 0.3)
    assert found(add(helium, "ionization", id="part", law=law, passive=True)) == set()
