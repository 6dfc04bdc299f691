"""Frequencies on the kernel's speed cells against the cross sections of the set files."""

import math
from itertools import pairwise

import numpy as np
import pytest
from scipy import integrate

from swarmgauge.gas import Gas, Mixture, PowerLaw, Process, load_named, shipped_sets
from swarmgauge.kernel.lookup import EXCITATION, SPEED_CELLS, speed_edges
from swarmgauge.swarm.curves import frequency_on_cells, process_curves, process_threshold
from swarmgauge.swarm.tables import build_tables

GASES = {name: load_named(name) for name in sorted(shipped_sets())}
PROCESSES = [(name, process.id) for name, gas in GASES.items() for process in gas.processes]


def maxwellian(w, thermal_eV):
    """Density of speeds in sqrt(eV)."""
    return 4 / math.sqrt(math.pi) * thermal_eV**-1.5 * w * w * np.exp(-w * w / thermal_eV)


def rate_by_quadrature(process, threshold, thermal_eV):
    """<w sigma> in 1e-20 m2 sqrt(eV) by scipy, cut at the breakpoints of the table."""
    breaks = np.sqrt(np.unique(np.append(process.breakpoints_eV, threshold)))
    top = math.sqrt(40 * thermal_eV + 2 * threshold)
    pieces = np.unique(np.concatenate([np.linspace(math.sqrt(threshold), top, 60), breaks]))
    pieces = pieces[(pieces >= math.sqrt(threshold)) & (pieces <= top)]
    total = 0.0
    for low, high in pairwise(pieces):
        total += integrate.fixed_quad(
            lambda w: w * process.cross_section(w * w) / 1e-20 * maxwellian(w, thermal_eV), low, high, n=20
        )[0]
    return total


def rate_of_tables(low, high, thermal_eV):
    """The same of a frequency linear in speed on the cells."""
    edges = speed_edges()
    x, weights = np.polynomial.legendre.leggauss(6)
    speed = 0.5 * (edges[1:] + edges[:-1])[:, None] + 0.5 * np.diff(edges)[:, None] * x
    part = (speed - edges[:-1, None]) / np.diff(edges)[:, None]
    value = (low[:, None] + part * (high - low)[:, None]) * maxwellian(speed, thermal_eV)
    return float((value @ weights * 0.5 * np.diff(edges)).sum())


@pytest.mark.parametrize(("name", "process_id"), PROCESSES)
def test_rates_over_maxwellians(name, process_id):
    # scipy's Gauss quadrature of the set file's own cross section.
    gas = GASES[name]
    process = gas.process(process_id)
    scale = 1.0 if process.third_body is None else 1e26
    threshold = process_threshold(gas, process)
    low, high = frequency_on_cells(process, threshold, scale)
    compared = 0
    for thermal_eV in (0.03, 0.3, 1.0, 3.0, 10.0, 50.0):
        exact = scale * rate_by_quadrature(process, threshold, thermal_eV)
        if exact > 1e-30 and threshold < 30 * thermal_eV:
            assert rate_of_tables(low, high, thermal_eV) == pytest.approx(exact, rel=1e-4), thermal_eV
            compared += 1
    assert compared >= 2


@pytest.mark.parametrize(("name", "process_id"), PROCESSES)
def test_nothing_below_the_threshold(name, process_id):
    gas = GASES[name]
    process = gas.process(process_id)
    low, high = frequency_on_cells(process, process_threshold(gas, process), 1.0)
    assert (low >= 0).all()
    assert (high >= 0).all()
    assert (low + high > 0).any() or process.third_body is not None
    starts = speed_edges()[:-1] ** 2
    if process.kind in ("excitation", "ionization"):
        assert not low[starts < process.threshold_eV * (1 + gas.mass_ratio)].any()
        assert not high[starts < process.threshold_eV * (1 + gas.mass_ratio)].any()


LEVELS = [(name, process.id) for name, gas in GASES.items() for process in gas.processes if process.is_level]


@pytest.mark.parametrize(("name", "process_id"), LEVELS)
def test_detailed_balance_in_a_maxwellian(name, process_id):
    # <w sigma_reverse> = (g_l / g_u) exp(gain / kT) <w sigma>, by scipy's quadrature of the forward cross section.
    gas = GASES[name]
    process = gas.process(process_id)
    threshold = process_threshold(gas, process)
    low, high = frequency_on_cells(process, threshold, 1.0, superelastic=True)
    assert (low >= 0).all()
    assert (high >= 0).all()
    compared = 0
    for thermal_eV in (0.03, 0.3, 1.0, 3.0):
        forward = rate_by_quadrature(process, threshold, thermal_eV)
        if forward > 1e-30 and threshold < 30 * thermal_eV:
            weights = process.degeneracy_lower / process.degeneracy_upper
            exact = weights * math.exp(threshold / thermal_eV) * forward
            assert rate_of_tables(low, high, thermal_eV) == pytest.approx(exact, rel=3e-4), thermal_eV
            compared += 1
    assert compared >= 2


@pytest.mark.parametrize("threshold", [1e-3, 0.05])
@pytest.mark.parametrize("thermal_eV", [0.0066, 0.05, 1.0])
def test_reverse_of_a_jump(threshold, thermal_eV):
    # sigma = 1e-20 m2 above the threshold: then <w sigma_reverse> = (g_l / g_u) (1 + threshold / kT) 2 (kT / pi)^1/2,
    # the integral of (e + threshold) exp(-e/kT). The frequency goes as 1/w near rest and must stay bounded.
    process = Process("v", "excitation", threshold, PowerLaw(1e-20, 0.0), degeneracy_lower=3, degeneracy_upper=2)
    low, high = frequency_on_cells(process, threshold, 1.0, superelastic=True)
    exact = 1.5 * (1 + threshold / thermal_eV) * 2 * math.sqrt(thermal_eV / math.pi)
    assert rate_of_tables(low, high, thermal_eV) == pytest.approx(exact, rel=2e-3)
    assert max(low.max(), high[0]) < max(400 * threshold * 1.5, 1.5 * speed_edges()[-1])


def test_reverse_processes_stand_behind_their_own():
    v1 = Process("v1", "excitation", 0.1, PowerLaw(1e-20, 0.0), degeneracy_lower=1, degeneracy_upper=2)
    v2 = Process("v2", "excitation", 3.0, PowerLaw(1e-20, 0.0), degeneracy_lower=1, degeneracy_upper=1)
    gases = [
        Gas(name, "X", 28.0, "momentum_transfer", (Process("elastic", "elastic", 0.0, PowerLaw(1e-19, 0.0)), v1, v2))
        for name in ("a", "b")
    ]
    mixture = Mixture({gases[0]: 0.3, gases[1]: 0.7}, temperature_K=600.0)
    curves = process_curves(mixture, passive=False)
    assert [(c.gas, c.rate_name + c.process.id) for c in curves] == [
        (gas, name)
        for gas in (0, 1)
        for name in ("rate:elastic", "rate:v1", "superelastic_rate:v1", "rate:v2")  # v2 holds less than 1e-12
    ]
    found = mixture.populations(gases[0])
    bare = frequency_on_cells(v1, process_threshold(gases[0], v1), 1.0)[0]
    np.testing.assert_allclose(curves[1].low, found[None] * bare, rtol=1e-12)
    tables = build_tables(mixture, curves, 1.0)
    loss = 0.1 * (1 + gases[0].mass_ratio)
    np.testing.assert_allclose(tables.loss[:3], [loss, -loss, 30 * loss], rtol=1e-12)
    assert (tables.kind == EXCITATION).all()
    total = tables.collision.reshape(2, SPEED_CELLS, 4)[0, :, 2]
    np.testing.assert_allclose(total, 0.3 * sum(curve.low for curve in curves[:4]), rtol=1e-12)
    assert process_curves(Mixture({gases[0]: 1.0}), passive=False)[2].rate_name == "rate:"
