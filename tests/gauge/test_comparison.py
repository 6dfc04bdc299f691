"""Each datum beside the computed value of its definition, state and field."""

import pytest

from gauge.conftest import RUN, drift_bulk, drifts
from swarmgauge.campaign import ResultsError, open_results
from swarmgauge.campaign.measured import read_measured
from swarmgauge.gauge.comparison import compare


@pytest.fixture
def compared_of(results_of):
    def compared(*rows, text=RUN):
        folder = results_of(*rows, text=text)
        return compare(open_results(folder), read_measured(folder / "measured.csv"))

    return compared


def test_every_mixture_of_the_gas_is_compared_at_the_nearest_temperature(compared_of):
    pairs = compared_of(*drifts([100.0]), *drifts([30.0], temperature_K=395))
    assert [(pair.state.mixture.split("-")[1], pair.state.temperature_K) for pair in pairs] == [
        ("phelps1985", 293.0),
        ("phelps1985", 400.0),
        ("schmalzried2023", 293.0),
        ("schmalzried2023", 400.0),
    ]
    for pair in pairs:
        assert pair.value.value == pytest.approx(drift_bulk(pair.datum.E_over_N_Td), rel=1e-12)


def test_pulls_hold_the_errors_of_both_sides(compared_of):
    (pair, _) = compared_of(*drifts([33.3], off=0.05))
    computed = 0.01 * drift_bulk(33.3)  # the stand-in stops below 1 %, at 20 x 2^n cohorts
    assert 0.4 * computed < pair.value.standard_error < 1.1 * computed
    measured = 0.02 * pair.datum.value
    assert pair.deviation == pytest.approx(0.05, rel=1e-6)
    assert pair.pull == pytest.approx(0.05 * pair.datum.value / (measured**2 + pair.computed_error**2) ** 0.5, rel=1e-6)


def test_bulk_is_not_compared_with_flux(compared_of):
    flux, _, bulk, _ = sorted(
        compared_of(*drifts([100.0]), *drifts([100.0], quantity="drift_velocity_flux", method="PT")),
        key=lambda pair: pair.datum.quantity,
        reverse=True,
    )
    assert flux.value.value == pytest.approx(1e5)
    assert bulk.value.value == pytest.approx(1.1e5)


def test_the_ratio_of_pulsed_townsend_papers_is_that_of_the_results(compared_of):
    name = "net_frequency_over_drift_bulk_over_N"
    (pair, _) = compared_of({"quantity": name, "E_over_N": 1000, "value": 1e-22, "unit": "m2", "method": "PT"})
    assert pair.value.value == pytest.approx((1e-20 * 1000 - 1e-18) / (1.1e3 * 1000))
    assert pair.value.standard_error > 0.0


NOT_COMPARED = {
    "another gas": ({"gas": "Ar"}, "no mixture of the campaign is Ar"),
    "cold": ({"temperature_K": 77}, "it was measured at 77 K and the nearest that was computed is 293 K"),
    "temperature unknown": ({"temperature_K": ""}, "the file states no temperature and the campaign has several"),
    "low field": ({"E_over_N": 1}, "the campaign has values of it from 10 to 1000 Td only"),
    "high field": ({"E_over_N": 2000}, "the campaign has values of it from 10 to 1000 Td only"),
    "steady stream": (
        {"quantity": "townsend_alpha_over_N", "unit": "1e-22 m2", "method": "SST"},
        "the results do not hold it. Give a target for it under [accuracy] and run again",
    ),
    "not computed": ({"quantity": "mean_energy", "unit": "eV", "method": "other", "E_over_N": 3000}, "from 10 to 1000"),
}


@pytest.mark.parametrize("case", NOT_COMPARED)
def test_why_not(compared_of, case):
    change, words = NOT_COMPARED[case]
    pairs = compared_of({**drifts([100.0])[0], **change})
    assert all(pair.computed is None for pair in pairs)
    assert words in pairs[0].why_not


OXYGEN = """
[gas]
temperature_K = 293
pressure_Pa = [10000, 100000]
fractions = { "oxygen-lawton1978" = 1.0 }
[field]
E_over_N_Td = [10, 30, 100, 300]
[accuracy]
mean_energy = 0.01
"""


def test_pressure_matters_where_three_bodies_meet(compared_of):
    rows = [
        *drifts([100.0], gas="O2", pressure_Pa=11000),
        *drifts([100.0], gas="O2", pressure_Pa=1000),
        *drifts([100.0], gas="O2"),
        {**drifts([30.0], gas="O2")[0], "quantity": "mean_energy", "unit": "eV", "method": "other"},
    ]
    near, far, unknown, energy = sorted(
        compared_of(*rows, text=OXYGEN), key=lambda pair: int(pair.datum.place.split()[-1])
    )
    assert near.state.pressure_Pa == 10000.0
    assert "it was measured at 1000 Pa and computed at 10000 Pa" in far.why_not
    assert "the file states no pressure" in unknown.why_not
    assert energy.computed is not None


def test_levels_away_from_the_temperature_are_no_measured_gas(compared_of):
    text = RUN.replace("[field]", "vibrational_temperature_K = 3000\n[field]").replace("[293, 400]", "293")
    text = text.replace('{ "nitrogen-phelps1985" = 1.0 }, ', "")
    (pair,) = compared_of(*drifts([100.0]), text=text)
    assert pair.why_not == "no mixture of the campaign is N2"


def test_results_without_a_list_of_mixtures_are_refused(results_of):
    results = open_results(results_of(*drifts([100.0])))
    del results.provenance["mixtures"]
    with pytest.raises(ResultsError, match="was written before data could be compared"):
        compare(results, [])
