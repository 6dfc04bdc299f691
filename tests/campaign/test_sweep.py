"""Sweeps of a run file, laid out."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from swarmgauge.campaign.runfile_model import Sweep
from swarmgauge.campaign.sweep import expand, fields_of


def sweep(start, end, per_decade):
    return Sweep.model_validate({"from": start, "to": end, "per_decade": per_decade})


def test_steps_are_powers_of_ten_to_six_digits():
    # 10^(1/4) and its powers from any table of logarithms: 1.778279, 3.162278, 5.623413.
    assert expand(sweep(10, 100, 4)) == [10.0, 17.7828, 31.6228, 56.2341, 100.0]


def test_end_is_always_there():
    assert expand(sweep(10, 500, 1)) == [10.0, 100.0, 500.0]


def test_step_within_a_percent_of_the_end_gives_way_to_it():
    assert expand(sweep(1, 10.09, 1)) == [1.0, 10.09]
    assert expand(sweep(1, 10.2, 1)) == [1.0, 10.0, 10.2]


def test_step_just_short_of_the_end_is_dropped_too():
    # 10^(3/3) = 10 in text of six digits, whatever the power gives in its last bit.
    assert expand(sweep(1, 10, 3)) == [1.0, 2.15443, 4.64159, 10.0]


def test_one_field():
    assert expand(sweep(50, 50, 8)) == [50.0]


def test_empty_sweep_is_refused():
    with pytest.raises(ValueError, match=r"from = 100 is above to = 10: the sweep is empty\. Swap them\."):
        expand(sweep(100, 10, 4))


def test_endless_sweep_is_refused():
    with pytest.raises(ValueError, match=r"at most 100000 are possible\. Lower per_decade\."):
        expand(sweep(1, 10, 1e9))


def test_list_keeps_its_order_and_drops_what_is_there_already():
    assert fields_of([30.0, 10.0, 30.0, 100.0]) == [30.0, 10.0, 100.0]


@given(
    start=st.floats(1e-3, 1e4),
    decades=st.floats(0, 5),
    per_decade=st.integers(1, 40),
)
def test_any_sweep_rises_and_reaches_its_end(start, decades, per_decade):
    end = start * 10**decades
    fields = expand(sweep(start, end, per_decade))
    assert fields[-1] == end
    assert fields == sorted(set(fields))
    assert len(fields) <= math.ceil(decades * per_decade) + 2
    assert all(float(f"{field:.6g}") == field for field in fields[:-1])
