"""Sets of one gas ranked by the data that all of them can meet."""

import numpy as np
import pytest

from gauge.conftest import drift_bulk, drifts
from swarmgauge.campaign import open_results
from swarmgauge.campaign.measured import read_measured
from swarmgauge.gauge.comparison import compare
from swarmgauge.gauge.ranking import ranking


def biased(results, part, from_Td=0.0):
    """The results with drift velocities of one set that are off by a relative part from a field on."""
    table = results.coefficients
    table.flags.writeable = True
    chosen = np.char.find(table["mixture"], "phelps1985") >= 0
    chosen &= (table["quantity"] == "drift_velocity_bulk") & (table["E_over_N_Td"] >= from_Td)
    table["value"][chosen] *= 1.0 + part
    return results


@pytest.fixture
def ranked_of(results_of):
    def ranked(part, from_Td=0.0):
        folder = results_of(*drifts([12.0, 30.0, 100.0, 464.159], off=0.004), *drifts([5.0]))
        return ranking(compare(biased(open_results(folder), part, from_Td), read_measured(folder / "measured.csv")))

    return ranked


def test_a_planted_fault_ranks_last_with_its_place(ranked_of):
    best, other = ranked_of(0.15, from_Td=400.0)
    assert (best.place, best.mixture, best.count, best.apart) == (1, "1 nitrogen-schmalzried2023", 4, None)
    assert (other.place, other.told_apart) == (2, True)
    assert (other.apart.quantity, other.apart.E_over_N_Td) == ("drift_velocity_bulk", 464.159)
    assert other.apart.ratio == pytest.approx(0.15, rel=1e-9)
    assert other.apart.best == pytest.approx(drift_bulk(464.159), rel=1e-9)


def test_what_the_data_cannot_tell_apart_is_not_told_apart(ranked_of):
    best, other = ranked_of(0.001)
    assert not other.told_apart
    assert other.chi_squared - best.chi_squared < 4.0


def test_one_set_alone_is_not_ranked(results_of):
    from gauge.test_verdict import ONE_SET

    folder = results_of(*drifts([100.0]), text=ONE_SET)
    assert ranking(compare(open_results(folder), read_measured(folder / "measured.csv"))) == []
