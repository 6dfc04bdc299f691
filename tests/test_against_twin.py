"""The kernel against the naive scalar twin, which shares no code with it: equal coefficients within errors.

The twin follows a swarm one electron at a time with a flat majorant; its ceiling is the energy exceeded during 1e-6 of
the time, taken generously from a table here.
"""

import math

import pytest
from twin import Twin

import swarmgauge as sg

# set, E/N in Td, ceiling in eV, twin's window in kernel time, windows dropped and used, largest relative error of W
QUICK = [
    ("model-ramp", 24.0, 4.0, 5.0, 8, 60, 0.002),
    ("model-ionization-f1", 10.0, 60.0, 2.0, 150, 250, 0.005),
]
LONG = [
    ("model-ramp", 12.0, 3.0, 5.0, 8, 400, 0.001),
    ("model-ionization-f0", 10.0, 60.0, 2.0, 150, 1500, 0.003),
    ("model-ionization-f05", 10.0, 60.0, 2.0, 150, 1500, 0.003),
    ("model-ionization-f1", 10.0, 60.0, 2.0, 150, 1500, 0.003),
    ("argon-yamabe1983", 100.0, 60.0, 1.5, 60, 400, 0.004),
    ("nitrogen-phelps1985", 100.0, 70.0, 1.5, 30, 300, 0.003),
]


def check(seed, name, field, ceiling, window, warm, windows, largest, batches):
    mixture = sg.Mixture({name: 1.0})
    accuracy = {"drift_velocity_*": largest / 2, "mean_energy": 0.002, "diffusion_T_times_N_flux": 0.01}
    point = sg.simulate(mixture, sg.Field(field), accuracy=accuracy, seed=seed)
    twin = Twin(mixture, field, ceiling, window).run(seed, 500, windows, warm, batches)
    pairs = {"drift_velocity_flux": twin.drift, "drift_velocity_bulk": twin.drift_bulk, "mean_energy": twin.energy}
    if "net_frequency_over_N" in point.estimates:
        pairs["ionization_frequency_over_N"] = twin.ionization
    else:
        pairs["diffusion_T_times_N_flux"] = twin.diffusion_t
    for quantity, (value, error) in pairs.items():
        estimate = point[quantity]
        combined = math.hypot(error, estimate.standard_error)
        # The twin's error comes from some 20 batches: 3.5 of them are as rare as 3 of a known error.
        assert abs(estimate.value - value) < 3.5 * combined, (
            f"{quantity}: {estimate!r} against {value:.6g}({error:.2g})"
        )
    drift = point["drift_velocity_flux"]
    assert math.hypot(drift.standard_error, twin.drift[1]) < largest * drift.value


@pytest.mark.parametrize(("name", "field", "ceiling", "window", "warm", "windows", "largest"), QUICK)
def test_same_coefficients(name, field, ceiling, window, warm, windows, largest):
    check(3, name, field, ceiling, window, warm, windows, largest, 20)


@pytest.mark.slow
@pytest.mark.parametrize(("name", "field", "ceiling", "window", "warm", "windows", "largest"), LONG)
def test_same_coefficients_closely(name, field, ceiling, window, warm, windows, largest):
    check(5, name, field, ceiling, window, warm, windows, largest, 20)
