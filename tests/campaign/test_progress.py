"""What the bars say."""

import math
from types import SimpleNamespace

import pytest

from swarmgauge.campaign.progress import described, duration
from swarmgauge.swarm.estimate import Estimate


@pytest.mark.parametrize(
    ("seconds", "text"),
    [
        (0.2, "0 s left"),
        (99.4, "99 s left"),
        (100.0, "2 min left"),
        (7200.0, "2 h left"),
        (1e9, "days left"),
        (math.nan, "time left unknown"),
    ],
)
def test_durations(seconds, text):
    assert duration(seconds) == text


def run_with(name, estimate, seconds_left, target="2 %"):
    result = SimpleNamespace(estimates={name: estimate}, targets={name: SimpleNamespace(target=target)})
    return SimpleNamespace(
        worst=(name, 1.6),
        field=SimpleNamespace(E_over_N_Td=123.456),
        result=lambda: result,
        seconds_left=seconds_left,
    )


def test_a_point_tells_error_target_and_time():
    run = run_with("diffusion_L_times_N_bulk", Estimate(2.0, 0.064, "", 40), 24.0)
    assert described(run, 2) == "123.456 Td diffusion_L_times_N_bulk 3.2 % of 2 %, 12 s left"


def test_long_names_are_cut_and_bounds_are_bounds():
    name = "rate:nitrogen-phelps1985/ionization-of-the-second-state"
    unseen = Estimate(0.0, math.nan, "m^3/s", 40, upper_bound=3.2e-21)
    text = described(run_with(name, unseen, math.inf, "3 % or 1e-23"), 2)
    assert text.endswith(" < 3.2e-21 of 3 % or 1e-23, time left unknown")
    assert len(text) <= 62
