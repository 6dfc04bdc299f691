"""The critical field: an exact case, and the steady swarm there."""

import math

import pytest
from kernel.model_gases import ELECTRON_U, constant_frequency, model, power_law

import swarmgauge as sg
from swarmgauge.gas import InputError
from swarmgauge.gas.constants import E_CHARGE, E_MASS, SPEED_1_EV, TOWNSEND
from swarmgauge.gas.process import Sharing

NU = 1e-13


def balanced(gain_at_1_eV, loss):
    """Atoms as light as electrons; ionization proportional to energy, attachment at constant frequency."""
    return model(
        ELECTRON_U,
        constant_frequency("elastic", NU),
        power_law("ionization", gain_at_1_eV / SPEED_1_EV, 0.5, sharing=Sharing("equal")),
        constant_frequency("attachment", loss),
    )


def test_ionization_proportional_to_energy(seed):
    # k <e> = nu_a. For constant collision frequency in a cold gas <e> = m W^2 / 2 (1 + M/m) with W = e E (1 + m/M) /
    # (m nu) (G. H. Wannier, Bell Syst. Tech. J. 32, 170 (1953)); births and losses of 1e-4 of all collisions change
    # <e> by less than 2e-4.
    energy = 5.0
    gain = 1e-5 * NU / energy
    drift = math.sqrt(energy * E_CHARGE / E_MASS)
    exact = drift * E_MASS * NU / (2.0 * E_CHARGE * TOWNSEND)
    root = sg.critical_field(balanced(gain, 1e-5 * NU), accuracy=1e-3, seed=seed)
    assert root.unit == "Td"
    assert root.standard_error < 1.5e-3 * exact
    assert abs(root.value - exact) < 3.5 * root.standard_error + 2e-4 * exact


def test_no_balance():
    with pytest.raises(InputError, match="no critical field"):
        sg.critical_field(sg.Mixture({"argon-yamabe1983": 1.0}))


def test_growth_in_space_vanishes_there_too(seed):
    mixture = balanced(0.01 * NU / 5.0, 0.01 * NU)
    root = sg.critical_field(mixture, accuracy=4e-3, seed=seed)
    point = sg.simulate(mixture, sg.Field(root.value), accuracy={"townsend_alpha_over_N": 0.005}, seed=seed + 50)
    alpha, effective = point["townsend_alpha_over_N"], point["townsend_effective_over_N"]
    # alpha rises as the square of the field here, eta falls with it: the root's error leaves this much
    left = math.hypot(effective.standard_error, 3.0 * alpha.value * root.standard_error / root.value)
    assert left < 0.02 * alpha.value
    assert abs(effective.value) < 3.5 * left
