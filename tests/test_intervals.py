"""The error bars are honest: a thinned form of tests/intervals/study.py, which takes minutes."""

import sys
from concurrent.futures import ThreadPoolExecutor
from pathlib import Path

import pytest
from scipy.stats import binomtest

sys.path.insert(0, str(Path(__file__).parent / "intervals"))
from study import LEVELS, study

RUNS = 40
# Three quantities whose errors have little to do with each other, so that hits may be counted together.
NEARLY_INDEPENDENT = ("drift_velocity_bulk", "diffusion_T_times_N_flux", "mean_energy")


@pytest.mark.parametrize(("gas", "field"), [("argon-yamabe1983", 100.0), ("nitrogen-phelps1985", 100.0)])
def test_intervals_hold_the_truth_as_often_as_they_say(gas, field):
    with ThreadPoolExecutor(2) as executor:
        cells = study(gas, field, RUNS, 6e4, executor, NEARLY_INDEPENDENT)
    trials = RUNS * len(cells)
    for place, level in enumerate(LEVELS):
        hits = sum(cell.hits[place] for cell in cells)
        # Errors 15 % too small would make 120 intervals of 68 % hold the truth 73 times instead of 82.
        assert binomtest(hits, trials, level).pvalue > 0.01, f"{hits} of {trials} at {level:g}"
