"""Electrons that leave a plane: exact cases, continuity, and what they become far away."""

import math

import numpy as np
import pytest
from kernel.model_gases import ELECTRON_U, constant_frequency, model, power_law

import swarmgauge as sg
from swarmgauge.gas import InputError
from swarmgauge.gas.constants import SPEED_1_EV, TOWNSEND

HEAVY_U = 1e9


def off(profile, name, exact):
    """Distance from the exact values in standard errors, (bins,)."""
    return (profile.values[name] - exact) / profile.standard_errors[name]


def test_a_beam_is_attenuated_as_exp_of_minus_N_sigma_z(seed):
    # Attachment alone: who is left has gone straight on; energy e_0 + e E z, no scattering, no way back.
    section, depth, field = 2e-20, 1e20, 50.0
    profile = sg.simulate_relaxation(
        model(HEAVY_U, power_law("elastic", 1e-30), power_law("attachment", section)),
        sg.Field(field),
        sg.Emission(3.0, directions="forward"),
        Nz=depth,
        bins=10,
        electrons=100_000,
        seed=seed,
    )
    edges = profile.Nz_edges
    exact = -np.diff(np.exp(-section * edges)) / (section * np.diff(edges))  # mean of the flux over a bin
    assert (profile.standard_errors["flux"] < 0.02 * exact).all()
    assert (abs(off(profile, "flux", exact)) < 4.0).all()
    energy = 3.0 + field * TOWNSEND * profile.Nz
    assert profile.values["mean_energy"] == pytest.approx(energy, rel=4e-3)
    assert profile.values["drift_velocity"] == pytest.approx(SPEED_1_EV * np.sqrt(energy), rel=4e-3)
    assert profile.values["growth_over_N"] == pytest.approx(np.full(10, -section), rel=4e-3)


def test_heavy_atoms_keep_the_total_energy(seed):
    # Elastic collisions with atoms that do not move: e = e_0 + e E z for everybody, whatever the way. In open gas all
    # come back across the plane in the end, and one passes for each that was emitted. (Energy without loss lets
    # electrons come back from far: the last bins miss those that turn behind the margin.)
    field, depth = 100.0, 2e20
    profile = sg.simulate_relaxation(
        model(HEAVY_U, constant_frequency("elastic", 1e-13)),
        sg.Field(field),
        sg.Emission([1.0, 2.0, 4.0], share=[1.0, 1.0], absorbing=False),
        Nz=depth,
        bins=8,
        electrons=40_000,
        seed=seed,
    )
    energy = 0.5 * 1.5 + 0.5 * 3.0 + field * TOWNSEND * profile.Nz
    assert profile.values["mean_energy"][1:] == pytest.approx(energy[1:], rel=0.02)
    assert profile.standard_errors["flux"].max() < 0.02
    assert (abs(off(profile, "flux", 1.0))[:5] < 4.0).all()


def test_an_absorbing_plane_takes_the_same_part_of_the_flux_everywhere(seed):
    # Nothing is born or lost in the gas: the flux is the same at every place, below 1 by what came back to the plane.
    profile = sg.simulate_relaxation(
        model(ELECTRON_U, constant_frequency("elastic", 1e-13)),
        sg.Field(100.0),
        sg.Emission(0.5),
        Nz=1.5e20,
        bins=10,
        electrons=100_000,
        seed=seed,
    )
    flux, error = profile.values["flux"], profile.standard_errors["flux"]
    assert error.max() < 4e-3
    assert flux.mean() < 0.99
    assert (abs(flux - flux.mean()) < 4.0 * error).all()


def test_far_from_the_plane_the_swarm_is_the_steady_one(seed):
    # Constant frequencies, over several e-foldings of alpha.
    mixture = model(ELECTRON_U, constant_frequency("elastic", 1e-13), constant_frequency("ionization", 5e-15))
    steady = sg.simulate(mixture, sg.Field(300.0), accuracy={"townsend_alpha_over_N": 0.005, "sst_*": 0.01}, seed=seed)
    profile = sg.simulate_relaxation(
        mixture, sg.Field(300.0), sg.Emission(0.1), Nz=6e20, bins=12, electrons=6_000, seed=seed
    )
    for name, known in (
        ("mean_energy", "sst_mean_energy"),
        ("drift_velocity", "sst_drift_velocity"),
        ("growth_over_N", "townsend_alpha_over_N"),
    ):
        estimate = steady[known]
        far, error = profile.values[name][6:], profile.standard_errors[name][6:]
        assert error.max() < 0.02 * estimate.value
        assert (
            abs(far - estimate.value) < 4.0 * np.hypot(error, estimate.standard_error) + 2e-3 * estimate.value
        ).all()
    assert profile.values["mean_energy"][0] < 0.9 * steady["sst_mean_energy"].value
    # continuity: the flux grows by what is born
    growth = np.log(profile.values["flux"][11] / profile.values["flux"][6]) / (5.0 * np.diff(profile.Nz_edges)[0])
    assert growth == pytest.approx(steady["townsend_alpha_over_N"].value, rel=0.02)
    assert math.exp(growth * 6e20) > 10.0


def test_equal_bits_for_any_number_of_threads(seed):
    arguments = (
        sg.Mixture({"argon-yamabe1983": 1.0}, temperature_K=293.0),
        sg.Field(100.0),
        sg.Emission([0.0, 0.2], [1.0]),
    )
    first, second = (
        sg.simulate_relaxation(*arguments, Nz=5e19, bins=5, electrons=1280, seed=seed, workers=workers)
        for workers in (1, 2)
    )
    for name, values in first.values.items():
        np.testing.assert_array_equal(values, second.values[name])
    np.testing.assert_array_equal(first.f0, second.f0)


@pytest.mark.parametrize(
    ("wrong", "said"),
    [
        ({"energy_eV": -1.0}, "energy_eV"),
        ({"energy_eV": [1.0, 0.5], "share": [1.0]}, "rising"),
        ({"energy_eV": [0.0, 1.0], "share": [1.0, 2.0]}, "share"),
        ({"energy_eV": 1.0, "directions": "sideways"}, "directions"),
    ],
)
def test_emissions_that_are_none(wrong, said):
    with pytest.raises(InputError, match=said):
        sg.Emission(**wrong)


@pytest.mark.parametrize(("wrong", "said"), [({"Nz": 0.0}, "Nz"), ({"bins": 0}, "bin"), ({"cohorts": 2}, "20 cohorts")])
def test_relaxations_that_are_none(wrong, said):
    with pytest.raises(InputError, match=said):
        sg.simulate_relaxation(
            sg.Mixture({"model-ramp": 1.0}), sg.Field(10.0), sg.Emission(1.0), **({"Nz": 1e20} | wrong)
        )
