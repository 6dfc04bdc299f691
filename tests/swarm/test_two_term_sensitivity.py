"""Derivatives of coefficients by cross sections: exact cases and identities."""

import math

import pytest
from kernel.model_gases import HELIUM_U, constant_frequency, model, power_law

from swarmgauge.gas import Gas, InputError, Mixture
from swarmgauge.gas.laws import Table
from swarmgauge.swarm.two_term import solve_two_term
from swarmgauge.swarm.two_term_sensitivity import two_term_sensitivities


def test_constant_collision_frequency():
    # W goes as 1 / nu, the energy as its square (Wannier 1953), D = W^2-like energy over nu as 1 / nu^3.
    found = two_term_sensitivities(model(HELIUM_U, constant_frequency("elastic", 1e-13)), 10.0)["model/elastic"]
    assert found["drift_velocity_flux"] == pytest.approx(-1.0, abs=1e-3)
    assert found["mean_energy"] == pytest.approx(-2.0, abs=3e-3)
    assert found["diffusion_T_times_N_flux"] == pytest.approx(-3.0, abs=4e-3)
    assert found["characteristic_energy_T_flux"] == pytest.approx(-2.0, abs=3e-3)


def test_hard_spheres():
    # Druyvesteyn: energy as 1 / sigma, W as sigma^(-1/2) of field over cross section, D N as sqrt(energy) / sigma.
    found = two_term_sensitivities(model(HELIUM_U, power_law("elastic", 6e-20)), 3.0)["model/elastic"]
    assert found["drift_velocity_flux"] == pytest.approx(-0.5, abs=1e-3)
    assert found["mean_energy"] == pytest.approx(-1.0, abs=2e-3)
    assert found["diffusion_T_times_N_flux"] == pytest.approx(-1.5, abs=2e-3)


@pytest.mark.parametrize(
    ("mixture", "field"),
    [
        (Mixture({"argon-yamabe1983": 1.0}), 30.0),
        (Mixture({"nitrogen-phelps1985": 1.0}), 100.0),
        (Mixture({"nitrogen-phelps1985": 0.8, "oxygen-schmalzried2023": 0.2}), 120.0),
    ],
    ids=["argon", "nitrogen", "air"],
)
def test_scaling_all_cross_sections_is_scaling_the_field(mixture, field):
    # Cold gas, two bodies: E/N and the cross sections enter by their ratio alone. A velocity or an energy then has
    # sum_j d ln A / d ln sigma_j = -d ln A / d ln(E/N), N D one less, a rate one more.
    found = two_term_sensitivities(mixture, field)
    step = 0.01
    above, below = (solve_two_term(mixture, field * math.exp(sign * step)).values for sign in (1.0, -1.0))
    for name, more in (
        ("drift_velocity_flux", 0.0),
        ("mean_energy", 0.0),
        ("diffusion_L_times_N_bulk", -1.0),
        ("diffusion_T_times_N_flux", -1.0),
        ("ionization_frequency_over_N", 1.0),
    ):
        slope = math.log(above[name] / below[name]) / (2.0 * step)
        total = sum(process[name] for process in found.values())
        assert total == pytest.approx(more - slope, abs=0.01 + 2e-3 * abs(slope)), name


def test_a_process_scaled_in_its_set():
    # The same by new sets: the first vibrational loss of nitrogen 3 % up and down.
    nitrogen = Mixture({"nitrogen-schmalzried2023": 1.0}).gases[0]
    process = max((p for p in nitrogen.processes if p.kind == "excitation"), key=lambda p: p.cross_section([2.3])[0])

    def with_factor(factor):
        law = Table(process.law.energy_eV, factor * process.law.cross_section_m2, process.law.beyond)
        processes = tuple(
            type(p)(p.id, p.kind, p.threshold_eV, law) if p.id == process.id else p for p in nitrogen.processes
        )
        gas = Gas(nitrogen.name, nitrogen.formula, nitrogen.molar_mass_g_per_mol, "momentum_transfer", processes)
        return solve_two_term(Mixture({gas: 1.0}), 50.0).values

    above, below = with_factor(1.03), with_factor(0.97)
    found = two_term_sensitivities(Mixture({with_name(nitrogen): 1.0}), 50.0)[f"{nitrogen.name}/{process.id}"]
    for name in ("drift_velocity_flux", "mean_energy", "ionization_frequency_over_N"):
        expected = math.log(above[name] / below[name]) / math.log(1.03 / 0.97)
        assert found[name] == pytest.approx(expected, abs=0.003 + 0.01 * abs(expected)), name


def with_name(gas):
    """The acting processes as a set of their own."""
    return Gas(gas.name, gas.formula, gas.molar_mass_g_per_mol, "momentum_transfer", gas.processes)


def test_traces_do_nothing_and_impossible_fields_are_refused():
    trace = Mixture({"nitrogen-phelps1985": 1.0, "argon-yamabe1983": 0.0})
    assert not any(name.startswith("argon") for name in two_term_sensitivities(trace, 50.0))
    with pytest.raises(InputError, match="E_over_N_Td"):
        two_term_sensitivities(trace, -1.0)
