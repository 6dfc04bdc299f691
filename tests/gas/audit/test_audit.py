"""The audit as a whole: sound sets pass, findings read well."""

import pytest

from swarmgauge.gas import load_named, shipped_sets
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
