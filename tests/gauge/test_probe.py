"""Which energies carry a rate, against exact distributions."""

from dataclasses import replace

import pytest
from scipy import stats

from swarmgauge.gas import InputError, Mixture, Table, load_named
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, E_MASS, TOWNSEND
from swarmgauge.gauge.probe import TEMPERATURE_K, probe, probe_lines
from swarmgauge.swarm import solve_two_term


@pytest.fixture
def plant():
    def change(gas, process_id, **changes):
        return replace(gas, published=tuple(replace(p, **changes) if p.id == process_id else p for p in gas.published))

    return change


def test_ranges_of_a_maxwellian():
    # Constant collision frequency nu: f0 is a Maxwellian with 3/2 kT_e = 3/2 kT + M W^2 / 2 (G. H. Wannier, 1953), so
    # the rate comes from a gamma distribution of energies (shape 3/2).
    gas = load_named("model-constant-frequency")
    found = probe(gas, 3.0)
    drift = E_CHARGE * 3.0 * TOWNSEND / (E_MASS * 1e-13)
    thermal = (BOLTZMANN * TEMPERATURE_K + gas.mass_kg * drift**2 / 3.0) / E_CHARGE
    exact = stats.gamma(1.5, scale=thermal).ppf([0.005, 0.5, 0.995])
    (elastic,) = found.processes
    assert [elastic.low_eV, elastic.middle_eV, elastic.high_eV] == pytest.approx(exact, rel=0.01)
    assert elastic.rate == pytest.approx(1e-13, rel=1e-3)
    assert found.mean_energy_eV == pytest.approx(1.5 * thermal, rel=2e-3)
    assert found.findings == ()


def test_rates_are_those_of_the_two_term_solution():
    gas = load_named("helium-crompton1970")
    values = solve_two_term(Mixture({gas: 1.0}, temperature_K=TEMPERATURE_K), 50.0).values
    for one in probe(gas, 50.0).processes:
        assert one.rate == pytest.approx(values[f"rate:{gas.name}/{one.process}"], rel=5e-3)
        assert one.low_eV < one.middle_eV < one.high_eV


def test_rate_from_beyond_the_table(plant):
    gas = load_named("helium-crompton1970")
    law = gas.process("ionization").law
    low = law.energy_eV < 35.0
    short = Table(law.energy_eV[low], law.cross_section_m2[low], "hold")
    findings = probe(plant(gas, "ionization", law=short), 50.0).findings
    assert ("doubt", "probed energies", "ionization") in {(one.grade, one.topic, one.process) for one in findings}


def test_outside_the_trusted_range():
    gas = load_named("helium-crompton1970")
    notes = [one.grade for one in probe(replace(gas, trusted_E_over_N_Td=(1.0, 10.0)), 30.0).findings]
    assert notes == ["note"]


def test_a_swarm_that_runs_away():
    findings = probe(load_named("helium-crompton1970"), 2000.0).findings
    assert ("doubt", "the two-term solution at 2000 Td has not converged; the ranges are worth little.") in {
        (one.grade, one.reason) for one in findings
    }


def test_three_body_processes_do_not_act():
    found = probe(load_named("oxygen-lawton1978"), 50.0)
    (three,) = [one for one in found.processes if one.three_body]
    # Of the order of 1e-42 m6/s times the share of slow electrons; per density, so far below two-body rates.
    assert 0.0 < three.rate < 1e-41
    lines = list(probe_lines(found))
    assert lines[-1].strip().startswith("Three-body")
    assert max(map(len, lines)) <= 80


def test_no_swarm():
    with pytest.raises(InputError, match="no elastic process"):
        probe(load_named("hydrogen-kim1994"), 10.0)


def test_ranges_move_up_with_the_field():
    gas = load_named("oxygen-schmalzried2023")
    low, high = (probe(gas, field).processes for field in (50.0, 500.0))
    assert all(a.middle_eV < b.middle_eV for a, b in zip(low, high, strict=True))
