"""Rates of Maxwellian electrons against closed forms and scipy's quadrature."""

import math
from itertools import pairwise

import numpy as np
import pytest
from kernel.model_gases import HELIUM_U, constant_frequency, model, power_law
from scipy import integrate

from swarmgauge.gas import Mixture, load_named
from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, SPEED_1_EV
from swarmgauge.swarm import solve_two_term
from swarmgauge.swarm.curves import ProcessCurve, frequency_on_cells, process_curves, process_threshold
from swarmgauge.swarm.maxwellian import MaxwellianRates
from swarmgauge.swarm.plan import RATE_UNIT

from .swarms import swarm

SETS = ("oxygen-lawton1978", "carbon-dioxide-hayashi1992")
CASES = [(name, process.id) for name in SETS for process in load_named(name).processes]
ENERGIES = np.array([0.047, 0.3, 1.03, 2.999, 3.001, 7.7, 40.0])


def rates(mixture):
    """Averages of the first gas of a mixture, m3/s."""
    averages = MaxwellianRates(process_curves(mixture, passive=False))
    return lambda energies: averages.frequencies(np.asarray(energies)) * RATE_UNIT


def by_quadrature(process, threshold, mean_energy):
    """(8 / pi m)^1/2 (kT)^-3/2 int e sigma(e) exp(-e/kT) de by scipy's adaptive quadrature, m3/s."""
    theta = mean_energy / 1.5
    top = threshold + 45.0 * theta
    knots = np.unique(np.concatenate([[threshold], process.breakpoints_eV, threshold + theta * np.arange(1, 45, 4)]))
    knots = np.concatenate([knots[(knots >= threshold) & (knots < top)], [top]])
    integral = math.fsum(
        integrate.quad(lambda e: e * float(process.cross_section(np.array(e))) * math.exp(-e / theta), a, b)[0]
        for a, b in pairwise(knots)
    )
    return SPEED_1_EV * 2.0 / math.sqrt(math.pi) * theta**-1.5 * integral


@pytest.mark.parametrize(("name", "process_id"), CASES)
def test_rates_of_a_set(name, process_id):
    gas = load_named(name)
    process = gas.process(process_id)
    threshold = process_threshold(gas, process)
    scale = 1.0 if process.third_body is None else 1e26
    low, high = frequency_on_cells(process, threshold, scale)

    found = MaxwellianRates([ProcessCurve(0, process, low, high)]).frequencies(ENERGIES)[:, 0] * RATE_UNIT
    compared = 0
    for energy, rate in zip(ENERGIES, found, strict=True):
        if threshold < 30 * energy / 1.5:
            exact = scale * by_quadrature(process, threshold, energy)
            if exact > 1e-28:
                assert rate == pytest.approx(exact, rel=1e-4), energy
                compared += 1
    assert compared >= 2


def test_closed_forms():
    # nu constant: itself. Hard spheres: sigma <v> = sigma (8 kT / pi m)^1/2. sigma = a e: nu = a v e, and
    # <v e> = 2 kT <v>.
    nu, sphere = 1e-13, 6e-20
    mixture = model(
        HELIUM_U,
        constant_frequency("elastic", nu),
        power_law("attachment", sphere, name="sphere"),
        power_law("attachment", sphere, 1.0, name="rising"),
    )
    theta = ENERGIES / 1.5
    mean_speed = SPEED_1_EV * np.sqrt(4 * theta / math.pi)
    found = rates(mixture)(ENERGIES)
    np.testing.assert_allclose(found[:, 0], nu, rtol=2e-5)
    np.testing.assert_allclose(found[:, 1], sphere * mean_speed, rtol=2e-6)
    np.testing.assert_allclose(found[:, 2], sphere * mean_speed * 2 * theta, rtol=2e-6)


def test_far_below_a_threshold():
    # A step at 10 eV: <nu> = sigma <v> (1 + 10 eV/kT) exp(-10 eV/kT), over 100 orders of magnitude and down to 0.
    mixture = model(1e6, power_law("elastic", 1e-20), power_law("excitation", 1e-20, threshold_eV=10.0))
    energies = np.array([1e-3, 0.07, 0.2, 0.9])
    theta = energies / 1.5
    exact = 1e-20 * SPEED_1_EV * np.sqrt(4 * theta / math.pi) * (1 + 10 / theta) * np.exp(-10 / theta)
    found = rates(mixture)(energies)[:, 1]
    assert found[0] == 0.0
    assert 0.0 < exact[1] < 1e-100
    # What lies in the cell of the threshold, at most 0.4 % of the energy, is carried up: x = 0.004 threshold/kT of a
    # falling exponential is put in one place, which costs less than x^2 / 8.
    assert (np.abs(found[1:] / exact[1:] - 1) < (0.004 * 10 / theta[1:]) ** 2 / 8).all()


def test_the_estimate_follows_the_mean_energy(seed):
    # Hard spheres: the rate goes with the root of the mean energy, so its relative error is half as large.
    sphere = 6e-20
    estimates, _ = swarm(model(0.4, power_law("elastic", sphere)), 3.0, seed, 20)
    energy, rate = estimates["mean_energy"], estimates["maxwellian_rate:model/elastic"]
    exact = sphere * SPEED_1_EV * math.sqrt(8 * energy.value / (3 * math.pi))
    assert rate.value == pytest.approx(exact, rel=1e-5)
    assert rate.standard_error / rate.value == pytest.approx(0.5 * energy.standard_error / energy.value, rel=1e-3)
    # In Druyvesteyn's distribution, f0 ~ exp(-(e/a)^2), <v> = a^1/2 / Gamma(3/4), <e> = a Gamma(5/4) / Gamma(3/4).
    druyvesteyn = 1 / math.gamma(0.75) / math.sqrt(8 / (3 * math.pi) * math.gamma(1.25) / math.gamma(0.75))
    true = estimates["rate:model/elastic"]
    assert true.standard_error < 0.002 * true.value
    assert true.value / rate.value == pytest.approx(druyvesteyn, rel=5e-3)


def test_neutrals_move(seed):
    # At E = 0 electrons are Maxwellian, so both rates are one, even with neutrals as light as 0.05 u (m/M = 0.011).
    estimates, _ = swarm(model(0.05, power_law("elastic", 6e-20), temperature_K=3000.0), 0.0, seed, 20)
    true, maxwellian = estimates["rate:model/elastic"], estimates["maxwellian_rate:model/elastic"]
    assert true.standard_error < 1e-3 * true.value
    assert abs(true.value - maxwellian.value) < 3.5 * math.hypot(true.standard_error, maxwellian.standard_error)
    kT = 3000.0 * BOLTZMANN / E_CHARGE
    ratio = model(0.05, power_law("elastic", 6e-20)).gases[0].mass_ratio
    exact = 6e-20 * SPEED_1_EV * math.sqrt(4 * kT * (1 + ratio) / math.pi)
    assert maxwellian.value == pytest.approx(exact, rel=3e-3)


@pytest.mark.parametrize("field", [3.0, 200.0])
def test_two_term_theory_has_them_too(field):
    mixture = Mixture({"oxygen-lawton1978": 1.0}, temperature_K=300.0, pressure_Pa=1e5)
    values = solve_two_term(mixture, field).values
    found = rates(mixture)([values["mean_energy"]])[0]
    density = mixture.density_m3
    for curve, rate in zip(process_curves(mixture, passive=False), found, strict=True):
        per_body = rate / density if curve.process.third_body is not None else rate
        name = f"maxwellian_{curve.rate_name}oxygen-lawton1978/{curve.process.id}"
        assert values[name] == pytest.approx(per_body, rel=3e-4, abs=1e-40)
