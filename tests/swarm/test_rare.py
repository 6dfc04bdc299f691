"""Rare events: split swarms against a closed form, and against plain swarms where both reach."""

import math
from concurrent.futures import ThreadPoolExecutor

import numpy as np
import pytest

import swarmgauge as sg
from swarmgauge.gas import Gas, Mixture, Process
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, SPEED_1_EV
from swarmgauge.gas.laws import PowerLaw
from swarmgauge.swarm import PointRun, drive
from swarmgauge.swarm.rare import rare_asked, target_weights
from swarmgauge.swarm.targets import parse_accuracy
from swarmgauge.swarm.two_term import solve_two_term

THRESHOLD_OVER_KT = 25.0


def maxwellian_gas():
    """A light gas at kT = 1 eV with a passive process of constant cross section above 25 kT."""
    elastic = Process(
        id="elastic", kind="elastic", threshold_eV=0.0, law=PowerLaw(5e-20, 0.0), label="elastic", source="invented"
    )
    tail = Process(
        id="tail",
        kind="excitation",
        threshold_eV=THRESHOLD_OVER_KT,
        law=PowerLaw(1e-20, 0.0),
        label="tail",
        source="invented",
        passive=True,
    )
    gas = Gas(
        name="light",
        formula="X",
        molar_mass_g_per_mol=0.02,
        elastic_is="momentum_transfer",
        published=(elastic, tail),
        source="invented",
        rights="none",
        note="for this test",
    )
    return Mixture({gas: 1.0}, temperature_K=E_CHARGE / BOLTZMANN)


def test_the_tail_of_a_maxwellian(seed):
    # Mean of sigma v over a Maxwellian for constant sigma above a threshold: sqrt(8 kT/(pi m)) sigma (1 + x) exp(-x),
    # x = threshold / kT (e.g. Lieberman and Lichtenberg, Principles of Plasma Discharges, section 3.5). The threshold
    # is one of the relative energy, and electrons and atoms together have the reduced mass: with the loss taken in the
    # centre of mass both follow from m -> mu, so x stays and the mean relative speed is sqrt(8 kT/(pi mu)).
    mixture = maxwellian_gas()
    ratio = mixture.gases[0].mass_ratio
    name = "rate:light/tail"
    point = sg.simulate(mixture, sg.Field(0.0), accuracy={name: 0.01, "mean_energy": 0.01}, seed=seed)
    x = THRESHOLD_OVER_KT
    mean_speed = math.sqrt(4.0 / math.pi) * SPEED_1_EV * math.sqrt(1.0 + ratio)  # sqrt(8 kT/(pi mu)), kT = 1 eV
    exact = mean_speed * 1e-20 * (1.0 + x) * math.exp(-x)
    rate = point[name]
    assert abs(rate.value - exact) < 3 * rate.standard_error
    assert rate.standard_error < 0.011 * exact
    energy = point["mean_energy"]
    assert abs(energy.value - 1.5) < 3 * energy.standard_error


@pytest.mark.parametrize(("name", "field"), [("nitrogen-phelps1985", 90.0), ("argon-yamabe1983", 40.0)])
def test_split_and_plain_swarms_agree(name, field, seed):
    mixture = Mixture({name: 1.0})
    rate = f"rate:{name}/ionization"
    accuracy = {"drift_velocity_flux": 0.005, "mean_energy": 0.005}
    plain = sg.simulate(mixture, sg.Field(field), accuracy=accuracy, seed=seed)
    asked = {**accuracy, rate: 0.02}
    assert rare_asked(mixture, sg.Field(field), parse_accuracy(asked)) == (f"{name}/ionization",)
    split = sg.simulate(mixture, sg.Field(field), accuracy=asked, seed=seed)
    for quantity in (
        "drift_velocity_flux",
        "drift_velocity_bulk",
        "diffusion_L_times_N_flux",
        "diffusion_T_times_N_flux",
        "mean_energy",
        "collision_frequency_over_N",
        rate,
    ):
        a, b = plain[quantity], split[quantity]
        assert abs(a.value - b.value) < 3.2 * math.hypot(a.standard_error, b.standard_error), quantity
    assert split[rate].standard_error < 0.02 * split[rate].value
    assert split[rate].standard_error < 0.5 * plain[rate].standard_error


def test_weights_fall_down_the_tail_in_powers_of_two():
    mixture = Mixture({"nitrogen-phelps1985": 1.0})
    weights = target_weights(mixture, solve_two_term(mixture, 50.0), ("nitrogen-phelps1985/ionization",), 512)
    assert weights[0] == 1.0
    assert np.all(np.diff(weights) <= 0.0)
    assert np.all(np.frexp(weights)[0] == 0.5)
    assert weights[-1] < 1e-6


BOTH = ("nitrogen-phelps1985/ionization", "nitrogen-phelps1985/ionization-b")


@pytest.mark.parametrize(
    ("accuracy", "field", "rare"),
    [
        ({"mean_energy": 0.01}, 50.0, ()),
        ({"rate:*/ionization": 0.02}, 400.0, ()),
        ({"ionization_frequency_over_N": 0.02}, 50.0, BOTH),
        ({"ionization_frequency_over_N": {"rel": 0.02, "from_Td": 60}}, 50.0, ()),
    ],
)
def test_only_what_is_asked_for_and_rare_is_split(accuracy, field, rare):
    mixture = Mixture({"nitrogen-phelps1985": 1.0})
    assert rare_asked(mixture, sg.Field(field), parse_accuracy(accuracy)) == rare


def test_a_split_point_goes_on_from_its_state(seed):
    mixture, field = Mixture({"nitrogen-phelps1985": 1.0}), sg.Field(50.0)
    accuracy = {"rate:nitrogen-phelps1985/ionization": 0.1}
    first = PointRun(mixture, field, seed=seed, accuracy=accuracy)
    assert first.key != PointRun(mixture, field, seed=seed).key
    with ThreadPoolExecutor(2) as executor:
        drive([first], executor, workers=2)
    again = PointRun(mixture, field, seed=seed, accuracy=accuracy, state=first.state())
    assert again.finished
    assert again.result().estimates == first.result().estimates
