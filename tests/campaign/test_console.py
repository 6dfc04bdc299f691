"""What a run prints."""

import math
import re
from types import SimpleNamespace

from hypothesis import given
from hypothesis import strategies as st

from campaign.stand_in import StandInRun
from swarmgauge.campaign.console import table
from swarmgauge.campaign.messages import remedies, warnings
from swarmgauge.gas import Mixture
from swarmgauge.swarm.estimate import Estimate
from swarmgauge.swarm.field import Field

AIR = Mixture({"nitrogen-phelps1985": 0.8, "oxygen-lawton1978": 0.2}, temperature_K=293.15, pressure_Pa=101325)
ARGON = Mixture({"argon-yamabe1983": 1.0}, temperature_K=293.15)


def point(field=100.0, mixture=AIR, cohorts=320, **changes):
    run = StandInRun(mixture, Field(field), accuracy={"mean_energy": 0.005})
    while run.cohorts < cohorts:
        run.advance()
    result = run.result()
    result.estimates.update(changes.pop("estimates", {}))
    return SimpleNamespace(**{**vars(result), **changes})


def test_the_table_is_the_pinned_one():
    lines = list(table([point(30), point(200)]))
    assert lines == [
        "0.8 nitrogen-phelps1985 + 0.2 oxygen-lawton1978 at 293.15 K, 101325 Pa:",
        "    E/N     energy     W flux     W bulk      D_T N      D_L N   nu_net/N   err/",
        "     Td         eV        m/s        m/s    1/(m s)    1/(m s)      m^3/s target",
        "     30   1.500(8) 3.00(2)e4 3.30(2)e4 1.50(1)e24 1.00(1)e24 -7.00(4)e-19   1.00",
        "    200   10.00(5) 2.00(1)e5 2.20(1)e5 1.50(1)e24 1.00(1)e24 1.000(5)e-18   1.00",
        "D_T N and D_L N are flux values; bulk values stand in coefficients.csv.",
    ]


def test_short_numbers_end_where_the_head_ends():
    quantities = ("mean_energy", "drift_velocity_flux", "drift_velocity_bulk", "net_frequency_over_N")
    quantities += ("diffusion_L_times_N_flux", "diffusion_T_times_N_flux")
    _, _, head, row, _ = table([point(200, estimates={name: Estimate(5.0, 2.0, "1", 20) for name in quantities})])
    assert [match.end() for match in re.finditer(r"\S+", row)] == [
        match.end() for match in re.finditer(r"\S+( s\))?", head)
    ]


def test_what_was_never_seen_is_a_bound_and_what_is_absent_a_dash():
    estimates = {"net_frequency_over_N": Estimate(0.0, math.nan, "m^3/s", 20, upper_bound=1.2e-22)}
    shown = point(estimates=estimates)
    del shown.estimates["drift_velocity_bulk"]
    row = list(table([shown]))[3].split()
    assert row[3] == "-"
    assert row[6] == "<1.2e-22"


def test_a_missed_target_is_marked_and_has_a_remedy():
    missed = point(cohorts=80, status="target missed", worst=("mean_energy", 2.0), wall_seconds=300.0)
    assert list(table([missed]))[3].endswith("2.00!")
    lines = list(remedies([point(), missed], max_minutes=5))
    assert " ".join(line.strip() for line in lines) == (
        "! 100 Td: mean_energy has 2 times the error of 0.5 % asked for after 5 min of its own. "
        "Raise max_minutes_per_point to about 24, or ask for less."
    )


def test_a_campaign_that_ran_out_of_time_is_told_to_take_more():
    missed = point(cohorts=80, status="target missed", worst=("mean_energy", 2.0), wall_seconds=60.0)
    lines = remedies([missed], max_minutes=5)
    assert " ".join(line.strip() for line in lines).endswith("Raise max_minutes by about 4, or ask for less.")


def test_a_process_never_seen_asks_for_an_absolute_target():
    missed = point(status="target missed", worst=("net_frequency_over_N", math.inf))
    assert list(table([missed]))[3].endswith(">999!")
    assert (
        'net_frequency_over_N was seen too seldom or never. Raise max_minutes_per_point, or give its target an "abs".'
        in " ".join(line.strip() for line in remedies([missed], max_minutes=5))
    )


def test_a_swarm_without_steady_state_says_so():
    (line,) = remedies([point(status="runaway")], max_minutes=5)
    assert line == "! 100 Td: runaway: no steady swarm, so no target can be met."


def test_fields_outside_the_trusted_range_are_marked_and_told():
    points = [point(field, ARGON) for field in (0.5, 10, 2000)]
    marks = [row.split()[0] for row in list(table(points))[3:6]]
    assert marks == ["~0.5", "10", "~2000"]
    assert list(warnings(points)) == ["~ 0.5, 2000 Td: set argon-yamabe1983 is trusted from 1 to 1000 Td only."]


def test_a_gas_far_from_the_temperature_of_its_set_is_told():
    hot = Mixture({"nitrogen-schmalzried2023": 1.0}, temperature_K=600)
    (line,) = warnings([point(100, hot)])
    assert line == "~ 100 Td: set nitrogen-schmalzried2023 stands for 293 K, not 600 K."


def test_a_warning_of_many_points_is_told_once():
    points = [point(field, warnings=("the tail is thin.",)) for field in (10, 20, 30, 40, 50)]
    assert "~ 10 to 50 Td: the tail is thin." in list(warnings(points))
    again = [point(10, mixture, warnings=("the tail is thin.",)) for mixture in (AIR, ARGON)]
    assert "~ 10 Td: the tail is thin." in list(warnings(again))


def test_warnings_of_one_kind_are_told_for_the_last_point():
    points = [point(field, warnings=(f"above a table: {field} %",)) for field in (10, 20)]
    assert list(warnings(points)) == ["~ 10, 20 Td, here for 20 Td: above a table: 20 % (all in provenance.json)"]


def test_long_blocks_are_cut_and_counted():
    lines = list(table([point(field) for field in range(10, 36)]))
    assert len(lines) == 3 + 20 + 2
    assert lines[-2] == "    and 6 more fields in coefficients.csv"


def test_one_block_for_each_mixture():
    lines = list(table([point(10), point(20), point(10, ARGON)]))
    assert [line for line in lines if line.endswith(":")] == [
        "0.8 nitrogen-phelps1985 + 0.2 oxygen-lawton1978 at 293.15 K, 101325 Pa:",
        "1 argon-yamabe1983 at 293.15 K:",
    ]


PLAIN = point(100)


@given(
    field=st.floats(1e-6, 1e5),
    scale=st.floats(-3, 3),
    sign=st.sampled_from([-1.0, 1.0]),
    relative=st.floats(1e-6, 0.5),
    excess=st.floats(0, 1e9),
    missed=st.booleans(),
)
def test_lines_have_80_columns_whatever_the_numbers(field, scale, sign, relative, excess, missed):
    typical = {
        "mean_energy": 3.0,
        "drift_velocity_flux": 1e5,
        "drift_velocity_bulk": 1e5,
        "diffusion_T_times_N_flux": 1e24,
        "diffusion_L_times_N_flux": 1e24,
        "net_frequency_over_N": sign * 1e-17,
    }
    estimates = {
        name: Estimate(value * 10**scale, relative * abs(value) * 10**scale, "1", 20) for name, value in typical.items()
    }
    shown = SimpleNamespace(
        conditions=SimpleNamespace(mixture=AIR, field=Field(field)),
        estimates=estimates,
        worst=("mean_energy", excess),
        status="target missed" if missed else "done",
    )
    lines = list(table([shown, PLAIN]))
    assert max(map(len, lines)) <= 80
    assert all(len(line.split()) == 8 for line in lines[3:5])
