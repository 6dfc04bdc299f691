"""The kernel's tables: majorants, units, averages over a warm gas."""

import math

import numpy as np
import pytest
from kernel.model_gases import HELIUM_U, model, power_law

from swarmgauge.gas import Mixture
from swarmgauge.kernel.lookup import ENERGY_CELLS, SPEED_CELLS, energy_cell_edges, speed_edges
from swarmgauge.swarm.curves import process_curves
from swarmgauge.swarm.tables import build_tables, neutral_speeds


@pytest.mark.parametrize("scale", [1.0, 0.01, 100.0])
@pytest.mark.parametrize("temperature", [0.0, 293.15])
def test_the_majorant_is_one(scale, temperature):
    # No speed that a flight from the middle of an energy cell can reach has a larger total frequency.
    mixture = Mixture({"argon-yamabe1983": 0.3, "nitrogen-schmalzried2023": 0.7}, temperature_K=temperature)
    curves = process_curves(mixture, passive=False)
    acceleration = 5.0
    tables = build_tables(mixture, curves, acceleration, scale)
    highest = tables.collision.reshape(2, SPEED_CELLS, 4)[:, :, 2:].max(axis=2)
    majorant = np.diff(tables.majorant.reshape(2, ENERGY_CELLS), axis=0, prepend=0.0)
    edges, energies = speed_edges(), energy_cell_edges()
    np.testing.assert_allclose(tables.inverse_majorant * tables.majorant.reshape(2, -1)[-1], 1.0, rtol=1e-12)
    for cell in range(0, ENERGY_CELLS, 7):
        reach = acceleration * tables.window_time[cell]
        for gas, width in enumerate(neutral_speeds(mixture)):
            slowest = max(math.sqrt(energies[cell]) - reach - 9.43 * width, 0.0)
            fastest = math.sqrt(energies[cell + 1]) + reach + 9.43 * width
            inside = (edges[1:] > slowest) & (edges[:-1] < fastest)
            if inside.any():
                assert majorant[gas, cell] >= highest[gas, inside].max()


def test_net_frequency_in_a_warm_gas():
    """Hard-sphere attachment in a gas so light that its motion counts, nu(w) = sigma <|w - u|> over the Maxwellian.

    <|w - u|> = s sqrt(2/pi) exp(-x^2) + (w + s^2/w) erf(x), x = w / (s sqrt 2) (Chapman and Cowling, 3rd ed., 5.4).
    """
    thermal_eV = 0.05
    mixture = model(
        0.05, power_law("elastic", 1e-20), power_law("attachment", 3e-20), temperature_K=thermal_eV * 11604.518
    )
    tables = build_tables(mixture, process_curves(mixture, passive=False), 1.0)
    net = tables.net_frequency.reshape(SPEED_CELLS, 2)
    width = float(neutral_speeds(mixture)[0])
    assert width == pytest.approx(math.sqrt(thermal_eV / 2 * mixture.gases[0].mass_ratio), rel=1e-6)
    for cell in (40, 100, 400, 1500):
        w = speed_edges()[cell]
        x = w / (width * math.sqrt(2))
        mean = width * math.sqrt(2 / math.pi) * math.exp(-x * x) + (w + width**2 / w) * math.erf(x)
        assert net[cell, 0] == pytest.approx(-3.0 * mean, rel=3e-3)  # 0.2 % near w = width
        assert net[cell - 1, 1] == pytest.approx(net[cell, 0], rel=1e-9)


def test_fractions_and_units():
    # 6e-20 m2 at 4 eV: frequency 6 x 2 in kernel units, times the fraction of the gas.
    gas = model(HELIUM_U, power_law("elastic", 6e-20)).gases[0]
    other = Mixture({gas: 0.25, "argon-yamabe1983": 0.75})
    tables = build_tables(other, process_curves(other, passive=False), 1.0)
    index = [g.name for g in other.gases].index("model")
    cell = int(np.searchsorted(speed_edges(), 2.0))
    collision = tables.collision.reshape(2, SPEED_CELLS, 4)[index, cell]
    np.testing.assert_allclose(collision, 0.25 * 6 * speed_edges()[cell + np.array([0, 1, 0, 1])], rtol=1e-9)
    assert tables.electron_part[index] == pytest.approx(gas.mass_ratio / (1 + gas.mass_ratio), rel=1e-12)
