"""Levels: populations, the reverse of an excitation, and what is refused."""

import json
import math

import numpy as np
import pytest
from scipy import constants, special

from swarmgauge.gas import Gas, Mixture, MixtureError, PowerLaw, Process, ProcessError, Ramp, load_named, shipped_sets
from swarmgauge.gas.levels import LEAST_POPULATION, superelastic_cross_section

ELASTIC = Process("elastic", "elastic", 0.0, PowerLaw(1e-20, 0.0))
ROTATIONAL_EV = 60.853 * 1.239842e-4  # B_e of hydrogen, 1/cm: K. P. Huber and G. Herzberg (1979), from memory
KELVIN_PER_EV = constants.e / constants.k


def excitation(name, threshold, lower_weight=1, upper_weight=1, **more):
    return Process(
        name,
        "excitation",
        threshold,
        Ramp(threshold, 1e-20),
        degeneracy_lower=lower_weight,
        degeneracy_upper=upper_weight,
        **more,
    )


def gas(*processes, name="a"):
    return Gas(name, "X2", 28.0, "momentum_transfer", (ELASTIC, *processes))


def shares(*processes, **state):
    mixture = Mixture({gas(*processes): 1.0}, **state)
    return mixture.populations(mixture.gases[0])


def boltzmann(weights, energies_eV, temperature_K):
    """Populations by scipy."""
    return special.softmax(np.log(weights) - np.array(energies_eV) * KELVIN_PER_EV / temperature_K)


def rotor(most):
    """Rotation of hydrogen, J to J + 2 by collisions; J = 1, which none of them reaches, by a cross section of 0."""
    weight = [(2 * j + 1) * (3 if j % 2 else 1) for j in range(most + 1)]
    steps = [Process("J1", "excitation", 2 * ROTATIONAL_EV, PowerLaw(0.0, 0.0), degeneracy_lower=1, degeneracy_upper=9)]
    for j in range(2, most + 1):
        gap = (j * (j + 1) - (j - 2) * (j - 1)) * ROTATIONAL_EV
        lower = None if j == 2 else f"J{j - 2}"
        steps.append(excitation(f"J{j}", gap, weight[j - 2], weight[j], lower=lower))
    energies = [j * (j + 1) * ROTATIONAL_EV for j in range(most + 1)]
    return steps, weight, energies


@pytest.mark.parametrize("temperature", [20.0, 77.0, 293.15, 1500.0])
def test_populations_of_a_rotor(temperature):
    steps, weight, energies = rotor(9)
    found = shares(*reversed(steps), temperature_K=temperature)
    expected = boltzmann(weight, energies, temperature)
    np.testing.assert_allclose([found[None], *(found[f"J{j}"] for j in range(1, 10))], expected, rtol=1e-9)


def test_populations_of_carbon_dioxide():
    # 667 1/cm, doubly degenerate: 2 exp(-0.083 eV/kT) = 7.5 % of the ground state at 293.15 K, by hand.
    carbon_dioxide = load_named("carbon-dioxide-hayashi1992")
    found = Mixture({carbon_dioxide: 1.0}, temperature_K=293.15).populations(carbon_dioxide)
    assert found == pytest.approx(
        dict(zip((None, "v1", "v3"), boltzmann([1, 2, 1], [0, 0.083, 0.291], 293.15), strict=True))
    )
    assert found["v1"] / found[None] == pytest.approx(0.0748, rel=2e-3)


def test_vibration_at_its_own_temperature():
    ladder = (
        excitation("v1", 0.2, vibrational=True),
        excitation("v2", 0.19, vibrational=True, lower="v1"),
        excitation("rot", 0.02, 1, 5),
    )
    found = shares(*ladder, temperature_K=300.0, vibrational_temperature_K=4000.0)
    v1 = math.exp(-0.2 * KELVIN_PER_EV / 4000.0)
    v2 = v1 * math.exp(-0.19 * KELVIN_PER_EV / 4000.0)
    rot = 5 * math.exp(-0.02 * KELVIN_PER_EV / 300.0)
    total = 1 + v1 + v2 + rot
    assert found == pytest.approx({None: 1 / total, "v1": v1 / total, "v2": v2 / total, "rot": rot / total})
    frozen = shares(*ladder, temperature_K=300.0, vibrational_temperature_K=0.0)
    assert (frozen["v1"], frozen["v2"]) == (0.0, 0.0)


def test_given_fractions():
    ladder = (excitation("v1", 0.1), excitation("a", 1.0, 3, 2), excitation("b", 0.5, lower="a"))
    found = shares(*ladder, temperature_K=600.0, level_fractions={"a/a": 0.25})
    weights = {
        None: 1.0,
        "v1": math.exp(-0.1 * KELVIN_PER_EV / 600),
        "b": 2 / 3 * math.exp(-1.5 * KELVIN_PER_EV / 600),
    }
    expected = {level: 0.75 * weight / sum(weights.values()) for level, weight in weights.items()}
    assert found == pytest.approx({**expected, "a": 0.25})
    assert math.fsum(found.values()) == pytest.approx(1.0, rel=1e-15)
    cold = shares(*ladder, level_fractions={"a/a": 0.3, "a/v1": 0.7})
    assert cold == pytest.approx({None: 0.0, "v1": 0.7, "a": 0.3, "b": 0.0}, abs=1e-15)


def test_a_cold_gas_is_in_its_ground_state():
    for name in shipped_sets():
        if not name.startswith("hydrogen"):
            given = load_named(name)
            left_out = [f"{name}/{p.id}" for p in given.processes if p.third_body is not None]
            found = Mixture({given: 1.0}, leave_out=left_out).populations(given)
            assert found.pop(None) == 1.0
            assert not any(found.values())


def test_which_share_a_process_finds():
    level, higher = excitation("v1", 0.1), excitation("v2", 0.1, lower="v1")
    lump = Process("lump", "excitation", 0.5, Ramp(0.5, 1e-20))
    hot_band = Process("hot", "excitation", 0.3, Ramp(0.3, 1e-20), lower="v1")
    watched = excitation("seen", 0.1, passive=True)
    rare = excitation("rare", 5.0)
    given = gas(level, higher, lump, hot_band, watched, rare)
    mixture = Mixture({given: 1.0}, temperature_K=900.0, leave_out=["a/v2"])
    found = mixture.populations(given)
    hit = {process.id: mixture.share_hit(given, process) for process in given.processes}
    assert hit == {
        "elastic": 1.0,
        "lump": 1.0,
        "v1": found[None],
        "seen": found[None],
        "rare": found[None],
        "v2": found["v1"],
        "hot": found["v1"],
    }
    excited = {process.id: mixture.share_excited(given, process) for process in given.processes}
    assert found["rare"] < LEAST_POPULATION
    assert {name: share for name, share in excited.items() if share} == {"v1": found["v1"], "v2": found["v2"]}
    assert found["v2"] == pytest.approx(found[None] * math.exp(-0.2 * KELVIN_PER_EV / 900.0))  # also when left out


def test_klein_and_rosseland():
    # g_u e sigma_reverse(e) = g_l (e + gain) sigma(e + gain), so that forward and reverse balance in a Maxwellian.
    process = excitation("a", 1.0, 3, 2)
    energy = np.array([1e-6, 0.1, 1.0, 7.0])
    for gain in (1.0, 1.0005):
        reverse = superelastic_cross_section(process, energy, gain)
        np.testing.assert_allclose(2 * energy * reverse, 3 * (energy + gain) * process.cross_section(energy + gain))


def test_canonical_form_holds_the_populations_that_act():
    plain = gas(Process("lump", "excitation", 0.1, Ramp(0.1, 1e-20)))
    assert "populations" not in Mixture({plain: 1.0}, temperature_K=300.0).canonical()
    given = gas(excitation("v1", 0.1, vibrational=True))
    assert "populations" not in Mixture({given: 1.0}).canonical()
    states = [
        {"temperature_K": 300.0},
        {"temperature_K": 300.0, "vibrational_temperature_K": 500.0},
        {"temperature_K": 300.0, "vibrational_temperature_K": 501.0},
        {"temperature_K": 300.0, "level_fractions": {"a/v1": 0.1}},
        {"level_fractions": {"a/v1": 0.1}},
    ]
    texts = {json.dumps(Mixture({given: 1.0}, **state).canonical()) for state in states}
    assert len(texts) == len(states)
    same = Mixture({given: 1.0}, temperature_K=300.0, vibrational_temperature_K=300.0)
    assert json.dumps(same.canonical()) == json.dumps(Mixture({given: 1.0}, temperature_K=300.0).canonical())


def test_a_mixture_says_what_was_given():
    mixture = Mixture(
        {gas(excitation("v1", 0.1, vibrational=True), excitation("a", 1.0)): 1.0},
        temperature_K=300.0,
        vibrational_temperature_K=2000.0,
        level_fractions={"a/a": 0.1},
    )
    assert mixture.describe() == "1 a (vibration 2000 K; 0.1 in a/a)"


LADDERS = [
    ([excitation("v2", 0.2, lower="v1")], 'process v2: lower = "v1" is not another excitation of this set. Use the id'),
    ([excitation("v2", 0.2, lower="v2")], 'process v2: lower = "v2" is not another excitation of this set. Use the id'),
    (
        [Process("v1", "excitation", 0.1, Ramp(0.1, 1e-20)), excitation("v2", 0.2, lower="v1")],
        'process v2: lower = "v1" is no level that can be populated. Give degeneracy_lower and degeneracy_upper to v1',
    ),
    (
        [excitation("v1", 0.1, passive=True), excitation("v2", 0.2, lower="v1")],
        'process v2: lower = "v1" is no level that can be populated. Give .* must not be passive',
    ),
    (
        [excitation("v1", 0.1, lower="v2"), excitation("v2", 0.2, lower="v1"), excitation("v3", 0.3, lower="v1")],
        'process v1: lower = "v2" leads back to itself and never to the ground state. Leave',
    ),
]


@pytest.mark.parametrize(("processes", "message"), LADDERS)
def test_impossible_ladders_are_refused(processes, message):
    with pytest.raises(ProcessError, match=message):
        gas(*processes)


STATES = [
    ({"vibrational_temperature_K": -1.0}, "vibrational_temperature_K = -1 is not possible. Give 0 .cold gas. to 1e6"),
    ({"vibrational_temperature_K": "hot"}, "vibrational_temperature_K = 'hot' is not a number"),
    ({"level_fractions": {"a/v1": "x"}}, "level_fractions: fraction of a/v1 = 'x' is not a number"),
    ({"level_fractions": {"a/v1": -0.1}}, "level_fractions: fraction of a/v1 = -0.1 is outside 0 to 1. Give its part"),
    (
        {"level_fractions": {"a/v9": 0.1}},
        '"a/v9" is not a process of this mixture. Did you mean a/v2.* are a/v1, a/v2.',
    ),
    ({"level_fractions": {"a/lump": 0.1}}, '"a/lump" leads to no level that can be populated: its process states no'),
    ({"level_fractions": {"a/v1": 0.6, "a/v2": 0.5}}, "level_fractions of a sum to 1.1, more than 1. Give parts"),
]


@pytest.mark.parametrize(("state", "message"), STATES)
def test_impossible_states_are_refused(state, message):
    lump = Process("lump", "excitation", 0.5, Ramp(0.5, 1e-20))
    with pytest.raises(MixtureError, match=message):
        Mixture({gas(excitation("v1", 0.1, vibrational=True), excitation("v2", 0.2), lump): 1.0}, **state)


def test_a_vibrational_temperature_needs_vibrations():
    with pytest.raises(
        MixtureError, match="vibrational_temperature_K = 500: no set of this mixture has a level marked"
    ):
        Mixture({gas(excitation("v1", 0.1)): 1.0}, vibrational_temperature_K=500)
