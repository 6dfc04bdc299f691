"""Benchmark models of the literature against the values printed there."""

import pytest
from swarm.swarms import assert_exact, swarm

from swarmgauge.gas import Mixture
from swarmgauge.swarm import solve_two_term

# I. D. Reid, Aust. J. Phys. 32, 231 (1979), in the values of K. F. Ness and R. E. Robson, Phys. Rev. A 34, 2185 (1986)
# and of later reviews; from memory, with the uncertainty that was noted with them.
RAMP = {
    1.0: {
        "mean_energy": (0.1015, 0.004),
        "drift_velocity_flux": (12720.0, 0.004),
        "diffusion_T_times_N_flux": (9.75e23, 0.012),
        "diffusion_L_times_N_flux": (7.525e23, 0.015),
    },
    12.0: {
        "mean_energy": (0.2689, 0.004),
        "drift_velocity_flux": (68380.0, 0.004),
        "diffusion_T_times_N_flux": (1.135e24, 0.012),
        "diffusion_L_times_N_flux": (5.688e23, 0.015),
    },
}


@pytest.mark.parametrize("field", RAMP)
def test_the_ramp_model(seed, field):
    estimates, _ = swarm(Mixture({"model-ramp": 1.0}), field, seed, 40)
    for name, (value, uncertainty) in RAMP[field].items():
        exact = {name: value}
        assert_exact(estimates, exact, {"mean": 2e-3, "drift": 2e-3, "diffusion": 7e-3}, theory=uncertainty / 3)


def test_the_ramp_model_defeats_two_terms(seed):
    # Ness and Robson (above): two terms miss D_T of the ramp model by more than a tenth at 12 and 24 Td, W by far less.
    for field in (12.0, 24.0):
        mixture = Mixture({"model-ramp": 1.0})
        estimates, _ = swarm(mixture, field, seed, 20)
        two_term = solve_two_term(mixture, field).values
        across = estimates["diffusion_T_times_N_flux"]
        assert (
            abs(two_term["diffusion_T_times_N_flux"] / across.value - 1.0)
            > 0.1 + 3 * across.standard_error / across.value
        )
        assert two_term["drift_velocity_flux"] == pytest.approx(estimates["drift_velocity_flux"].value, rel=0.05)


def test_the_ionization_model_without_ionization(seed):
    # J. Lucas and H. T. A. Saelee, J. Phys. D: Appl. Phys. 8, 640 (1975); mean energy of Ness and Robson (1986) and of
    # A. M. Nolan et al., J. Phys. D: Appl. Phys. 30, 2865 (1997); from memory.
    estimates, _ = swarm(Mixture({"model-ionization-f0": 1.0}), 10.0, seed, 40)
    assert_exact(estimates, {"mean_energy": 5.575}, {"mean_energy": 1.5e-3}, theory=2e-4)
