"""The audit as a whole: sound sets pass, findings read well."""

import pytest
from hypothesis import HealthCheck, Phase, given, reject, settings
from hypothesis import strategies as st

from swarmgauge.gas import Gas, InputError, PowerLaw, Process, Ramp, Table, load_named, shipped_sets
from swarmgauge.gas.audit.audit import check_set
from swarmgauge.gas.audit.finding import Finding, percent


@pytest.mark.parametrize("name", shipped_sets())
def test_no_shipped_set_has_an_error(name):
    for finding in check_set(load_named(name)):
        assert finding.grade != "error", finding
        assert finding.reason.endswith(".")
        assert finding.remedy.endswith(".")


def test_models_are_only_told_that_they_are_none_of_nature():
    for name in shipped_sets():
        if name.startswith("model-"):
            assert [(one.grade, one.topic) for one in check_set(load_named(name))] == [("note", "reference values")]


def test_errors_come_first(helium, plant):
    gas = plant(plant(helium, "ionization", threshold_eV=10.0), "triplets", threshold_eV=19.0)
    grades = [one.grade for one in check_set(gas)]
    assert grades[0] == "error"
    assert grades == sorted(grades, key=["error", "doubt", "note"].index)


def test_places_in_words():
    assert Finding("note", "t", "r", "d").place == "set"
    assert Finding("note", "t", "r", "d", "v1", 0.5, row=3).place == "v1, row 3, 0.5 eV"
    assert Finding("note", "t", "r", "d", "v1", 0.5, 10000.0).place == "v1, 0.5 to 10000 eV"
    assert Finding("note", "t", "r", "d", "v1", 0.5, 0.5).place == "v1, 0.5 eV"


def test_per_cents_keep_two_digits():
    assert [percent(share) for share in (0.00123, 0.05, 0.5, 1.0, 2.5)] == ["0.12 %", "5 %", "50 %", "100 %", "250 %"]


ENERGIES = st.floats(1e-6, 1e4) | st.sampled_from([0.0, 1e-6, 1.0, 15.7596, 100.0, 1e4, 1e8])
SECTIONS = st.sampled_from([0.0, 1e-26, 1e-22, 1e-20, 3e-19, 1e-10, 1e30, 1e-40])


@st.composite
def processes(draw, number):
    energy = sorted(draw(st.sets(ENERGIES, min_size=2, max_size=9)))
    section = draw(st.lists(SECTIONS, min_size=len(energy), max_size=len(energy)))
    kind = draw(st.sampled_from(["elastic", "excitation", "ionization", "attachment"]))
    return {
        "id": f"p{number}",
        "kind": kind,
        "threshold_eV": 0.0 if kind == "elastic" else draw(ENERGIES),
        "law": draw(
            st.builds(Table, st.just(energy), st.just(section), st.sampled_from(["zero", "hold", -0.7, 3.0]))
            | st.builds(PowerLaw, SECTIONS, st.floats(-3.0, 2.0))
            | st.builds(Ramp, ENERGIES, SECTIONS)
        ),
        "passive": draw(st.booleans()),
        "third_body": "any" if kind == "attachment" and draw(st.booleans()) else None,
    }


@given(st.data())
@settings(max_examples=150, deadline=None, suppress_health_check=list(HealthCheck), phases=[Phase.generate])
def test_whatever_can_be_a_set_can_be_checked(data):
    try:
        gas = Gas(
            name="any",
            formula=data.draw(st.sampled_from(["He", "Ar", "O2", "CO2", "SF6", "X"])),
            molar_mass_g_per_mol=data.draw(st.sampled_from([1e-3, 4.0, 44.0, 1e9])),
            elastic_is=data.draw(st.sampled_from(["momentum_transfer", "total_momentum_transfer", "integral"])),
            published=tuple(Process(**data.draw(processes(n))) for n in range(data.draw(st.integers(1, 4)))),
        )
    except InputError:
        reject()
    for finding in check_set(gas):
        assert finding.reason
        assert "nan" not in finding.reason.split()
