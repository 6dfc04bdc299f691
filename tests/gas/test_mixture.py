"""Mixtures: order, fractions, third bodies, what is left out, and what is refused."""

import json
import math
import pickle

import numpy as np
import pytest

from swarmgauge.gas import Gas, Mixture, MixtureError, PowerLaw, Process, SetFileError, load_named
from swarmgauge.gas.constants import BOLTZMANN

ELASTIC = Process("elastic", "elastic", 0.0, PowerLaw(1e-20, 0.0))


def capture(third_body, name="capture"):
    return Process(name, "attachment", 0.0, PowerLaw(1e-45, 0.0), third_body=third_body)


def gas(name="a", formula="X", *others):
    return Gas(name, formula, 32.0, "momentum_transfer", (ELASTIC, *others))


def test_gases_are_in_order_of_their_names():
    names = {"oxygen-lawton1978": 0.2, "nitrogen-phelps1985": 0.8}
    mixture = Mixture(names, temperature_K=293.15, pressure_Pa=101325)
    other = Mixture(dict(reversed(names.items())), temperature_K=293.15, pressure_Pa=101325)
    assert [member.name for member in mixture.gases] == ["nitrogen-phelps1985", "oxygen-lawton1978"]
    np.testing.assert_array_equal(mixture.fractions, [0.8, 0.2])
    assert mixture.describe() == "0.8 nitrogen-phelps1985 + 0.2 oxygen-lawton1978"
    assert repr(mixture) == f"Mixture({mixture.describe()}, 293.15 K, 101325 Pa)"
    assert json.dumps(mixture.canonical()) == json.dumps(other.canonical())
    # Loschmidt-like: 101325 Pa at 293.15 K is 2.5035e25 1/m3 (2.686780e25 x 273.15 / 293.15, CODATA).
    assert mixture.density_m3 == pytest.approx(2.686780e25 * 273.15 / 293.15, rel=1e-6)


def test_fractions_are_used_as_given():
    mixture = Mixture({gas("a"): 0.3, gas("b"): 0.7000005})
    assert mixture.fractions.tolist() == [0.3, 0.7000005]
    with pytest.raises(ValueError, match="read-only"):
        mixture.fractions[0] = 1.0
    assert Mixture({gas("a"): 1, gas("b"): 0}).fractions.tolist() == [1.0, 0.0]


def test_sets_by_path(written, content):
    path = written(content)
    assert Mixture({str(path): 1.0}).gases[0].name == "toy"


def test_canonical_form_follows_the_physics():
    base = Mixture({gas("a"): 0.5, gas("b"): 0.5}, temperature_K=300.0)
    others = [
        Mixture({gas("a"): 0.4, gas("b"): 0.6}, temperature_K=300.0),
        Mixture({gas("a"): 0.5, gas("b"): 0.5}, temperature_K=301.0),
        Mixture({gas("a"): 0.5, gas("b"): 0.5}, temperature_K=300.0, pressure_Pa=1.0),
        Mixture({gas("a"): 0.5, gas("b", "Y"): 0.5}, temperature_K=300.0),
        Mixture({gas("a"): 0.5, gas("b", "X", capture(None)): 0.5}, temperature_K=300.0),
    ]
    assert all(other.canonical() != base.canonical() for other in others)
    left_out = Mixture({gas("a"): 0.5, gas("b", "X", capture(None)): 0.5}, 300.0, leave_out=["b/capture"])
    assert left_out.canonical() == base.canonical()


def test_a_mixture_survives_the_way_to_another_worker():
    mixture = Mixture({"oxygen-lawton1978": 1.0}, temperature_K=300.0, pressure_Pa=1e5)
    assert pickle.loads(pickle.dumps(mixture)).canonical() == mixture.canonical()


def test_what_is_left_out_does_not_act():
    mixture = Mixture({"oxygen-lawton1978": 1.0}, leave_out="oxygen-lawton1978/attachment-3body")
    ids = [process.id for process in mixture.acting(mixture.gases[0])]
    assert "attachment-3body" not in ids
    assert len(ids) == len(mixture.gases[0].processes) - 1


@pytest.mark.parametrize(
    ("third_body", "bodies"),
    [
        ("self", {"a": 1.0, "c": 1.0}),
        ("any", {"a": 1.0, "b": 1.0, "c": 1.0}),
        ({"Y": 0.25}, {"b": 0.25}),
        ({"X": 1.0, "Y": 0.02, "Z": 5.0}, {"a": 1.0, "b": 0.02, "c": 1.0}),
        ({"Z": 1.0}, {}),
    ],
)
def test_third_bodies(third_body, bodies):
    # Gases a and c have the formula of the process's own gas.
    first = gas("a", "X", capture(third_body))
    mixture = Mixture({first: 0.5, gas("b", "Y"): 0.3, gas("c", "X"): 0.2}, temperature_K=300.0, pressure_Pa=1e5)
    process = first.process("capture")
    assert mixture.third_bodies(first, process) == bodies
    share = sum(bodies.get(name, 0.0) * x for name, x in (("a", 0.5), ("b", 0.3), ("c", 0.2)))
    expected = share * 1e5 / (BOLTZMANN * 300.0)
    assert mixture.body_density_m3(first, process) == pytest.approx(expected, rel=1e-14)
    assert mixture.body_density_m3(first, first.process("elastic")) == 1.0


IMPOSSIBLE = [
    (lambda: Mixture({}), "fractions is empty. Give"),
    (lambda: Mixture({gas("a"): 0.5}), "fractions of a sum to 0.5, not to 1 within 1e-6. Correct"),
    (lambda: Mixture({gas("a"): 0.5, gas("b"): 0.50001}), "sum to 1.00001, not to 1"),
    (lambda: Mixture({gas("a"): -0.5, gas("b"): 1.0}), "fraction of a = -0.5 is outside 0 to 1. Give"),
    (lambda: Mixture({gas("a"): math.nan}), "fraction of a = nan is outside"),
    (lambda: Mixture({gas("a"): "all"}), "fraction of a = 'all' is not a number. Write"),
    (lambda: Mixture({gas("a"): True}), "fraction of a = True is not a number"),
    (lambda: Mixture({gas("a"): 0.5, gas("a"): 0.5}), "two sets have the same name .* Give each set once"),
    (lambda: Mixture({gas(): 1.0}, temperature_K=-1.0), "temperature_K = -1 is not possible. Give"),
    (lambda: Mixture({gas(): 1.0}, temperature_K=math.inf), "temperature_K = inf is not possible"),
    (lambda: Mixture({gas(): 1.0}, temperature_K="300"), "temperature_K = '300' is not a number"),
    (lambda: Mixture({gas(): 1.0}, 300.0, pressure_Pa=0.0), "pressure_Pa = 0 is not possible. Give"),
    (lambda: Mixture({gas(): 1.0}, 0.0, pressure_Pa=1e5), "a cold gas has no pressure. Give a temperature, or leave"),
    (lambda: Mixture({gas(): 1.0}, 5e-324, pressure_Pa=1e5), "is no gas: N = p/kT > .* Correct one"),
    (lambda: Mixture({gas(): 1.0}, leave_out=["a/elastik"]), '"a/elastik" is not a process .* Did you mean a/elastic?'),
    (
        lambda: Mixture({gas(): 1.0}, leave_out=["a/elastic"]),
        "set a has no elastic process that acts .* do not leave out",
    ),
    (
        lambda: Mixture({gas("a", "X", capture("self")): 1.0}, 300.0),
        r'process a/capture needs a third body.* Give pressure_Pa .* leave_out = \["a/capture"\]',
    ),
    (
        lambda: Mixture({"hydrogen-kim1994": 1.0}),
        r"set hydrogen-kim1994 has no elastic process that acts \(it has: ionization\).* Use a complete set",
    ),
]


@pytest.mark.parametrize(("make", "message"), IMPOSSIBLE)
def test_impossible_mixtures_are_refused(make, message):
    with pytest.raises(MixtureError, match=message):
        make()


def test_unknown_sets_get_a_suggestion():
    with pytest.raises(SetFileError, match=r'"argon-yamabe" is unknown. Did you mean argon-yamabe1983\? Known sets: '):
        Mixture({"argon-yamabe": 1.0})
    with pytest.raises(SetFileError, match=r"nowhere\.toml: cannot be read"):
        Mixture({"nowhere.toml": 1.0})


def test_a_gas_is_known_by_its_mass():
    # Electron over alpha particle, 1.370933554787e-4 (CODATA 2018), plus two electrons; the set rounds the mass.
    assert load_named("model-hard-sphere").mass_ratio == pytest.approx(
        1.370933554787e-4 / (1 + 2 * 1.3709e-4), rel=1e-6
    )
