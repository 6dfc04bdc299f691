"""The whole swarm against cases whose answer is known exactly."""

import math

import numpy as np
import pytest
from kernel.model_gases import ELECTRON_U, HELIUM_U, constant_frequency, model, power_law
from scipy import integrate, stats

from swarm.swarms import assert_exact, cohorts, swarm
from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import ATOMIC_MASS, BOLTZMANN, E_CHARGE, E_MASS, SPEED_1_EV, TOWNSEND
from swarmgauge.gas.process import Sharing
from swarmgauge.swarm import Field, simulate
from swarmgauge.swarm.point_run import estimates_of

NU = 1e-13  # collision frequency over N, m3/s
ROOM_K = 293.15
MASSES = {"m/M=1": ELECTRON_U, "m/M=0.01": 100 * ELECTRON_U, "4u": HELIUM_U}
FIELDS = {"m/M=1": 300.0, "m/M=0.01": 50.0, "4u": 10.0}


def constant_frequency_moments(molar_mass, field, temperature, ionization=0.0):
    """Exact moments where elastic collisions have the constant frequency NU and scatter isotropically.

    Momentum: W = e E (m + M) / (m M nu). Energy: 3/2 kT + (m + M) W^2 / 2 (G. H. Wannier, Bell Syst. Tech. J. 32, 170
    (1953)). Position times velocity relaxes at the rate of momentum, so that D = Var(v) (m + M) / (M nu) along and
    across; <v_x^2> and <v_z^2> from v v before and after a collision, both exact for any mass ratio. The digits of the
    first case at 4 u are those of the closed forms kept with the published data (from memory).
    ionization : frequency over N of an ionization without loss, shared equally (only cold): each electron is replaced
    by two of half the energy, isotropic about the centre of mass. Growth dilutes all means at its own rate, and
    attachment at a constant frequency takes all alike and drops out.
    """
    m, M, kT = E_MASS, molar_mass * ATOMIC_MASS, BOLTZMANN * temperature
    electron, neutral = m / (m + M), M / (m + M)
    a = E_CHARGE * field * TOWNSEND / m
    rate = (NU + 2 * ionization) * neutral
    drift = a / rate
    if ionization == 0.0:
        square = 3 * kT / m + (m + M) * drift**2 / m
    else:
        loss = 2 * electron * neutral * NU + ionization * (2 - 2 * electron**2 - neutral**2)
        square = 2 * a * drift / loss
    turning = (NU + 2 * ionization) * (1 - electron**2)
    across = ((NU + ionization) * neutral**2 * square / 3 + 2 * NU * neutral**2 * kT / M) / turning
    along = across + 2 * a * drift / turning
    values = {"drift_velocity": drift, "diffusion_T_times_N": across / rate}
    values["diffusion_L_times_N"] = (along - drift**2) / rate
    exact = {f"{name}_{kind}": value for name, value in values.items() for kind in ("flux", "bulk")}
    return exact | {"mean_energy": 0.5 * m * square / E_CHARGE, "collision_frequency_over_N": NU}


def test_the_moments_agree_with_the_closed_forms_kept_with_the_data():
    # closed_forms.csv, maxwell_constant_nu without B: 6 digits, from memory.
    for temperature, energy, across, along in (
        (0.0, 6.41908, 7.52563e24, 7.52873e24),
        (293.15, 6.45697, 7.57007e24, 7.57316e24),
    ):
        exact = constant_frequency_moments(HELIUM_U, 10.0, temperature)
        assert exact["drift_velocity_flux"] == pytest.approx(17590.6, rel=1e-5)
        assert exact["mean_energy"] == pytest.approx(energy, rel=1e-5)
        assert exact["diffusion_T_times_N_flux"] == pytest.approx(across, rel=1e-5)
        assert exact["diffusion_L_times_N_flux"] == pytest.approx(along, rel=1e-5)


@pytest.mark.parametrize(
    ("mass", "temperature"),
    [("m/M=1", 0.0), ("m/M=1", ROOM_K), ("m/M=0.01", 0.0), ("m/M=0.01", ROOM_K), ("4u", ROOM_K)],
)
def test_constant_collision_frequency(seed, mass, temperature):
    # m/M = 1 too: the two-term start is far off there (energy by a factor), and the swarm forgets it.
    molar_mass, field = MASSES[mass], FIELDS[mass]
    count, fine, coarse = {"m/M=1": (40, 5e-4, 4e-3), "m/M=0.01": (30, 2e-3, 8e-3), "4u": (20, 8e-3, 0.04)}[mass]
    mixture = model(molar_mass, constant_frequency("elastic", NU), temperature_K=temperature)
    estimates, _ = swarm(mixture, field, seed, count)
    exact = constant_frequency_moments(molar_mass, field, temperature)
    precision = {"collision": 1e-3, "drift": fine, "mean_energy": fine, "diffusion": coarse}
    assert_exact(estimates, exact, precision)
    residual = estimates["energy_balance_residual"]
    assert abs(residual.value) < 3.5 * residual.standard_error
    assert residual.standard_error < 2e-3


@pytest.mark.slow
@pytest.mark.parametrize("temperature", [0.0, ROOM_K])
def test_constant_collision_frequency_of_helium_to_a_thousandth(seed, temperature):
    mixture = model(HELIUM_U, constant_frequency("elastic", NU), temperature_K=temperature)
    accuracy = {"drift_velocity_flux": 0.001, "mean_energy": 0.001}
    point = simulate(mixture, Field(10.0), seed=seed, accuracy=accuracy, max_minutes=20)
    exact = constant_frequency_moments(HELIUM_U, 10.0, temperature)
    assert_exact(point, exact, {"collision": 1e-4, "drift": 1e-3, "mean_energy": 1e-3, "diffusion": 8e-3})


def maxwellian_shares(edges_eV, thermal_eV):
    """Share of a Maxwellian in each bin of energy."""
    return np.diff(stats.gamma(1.5, scale=thermal_eV).cdf(edges_eV))


def chi_squared_of_shares(reducer, rows, exact_shares, bins):
    """Probability of the shares of time in `bins` groups of equal exact share; covariance from the cohorts."""
    lab = rows[:, reducer.layout.slices["lab"]].reshape(len(rows), -1, 2)[:, :, 0]
    shares = lab / lab.sum(axis=1, keepdims=True)
    group = np.minimum((np.cumsum(exact_shares) - 0.5 * exact_shares) * bins, bins - 1).astype(int)
    grouped = np.array([np.bincount(group, weights=row, minlength=bins) for row in shares])
    off = (grouped.mean(axis=0) - np.bincount(group, weights=exact_shares, minlength=bins))[:-1]
    covariance = np.cov(grouped[:, :-1].T) / len(rows)
    squared = off @ np.linalg.solve(covariance, off)  # Hotelling's T^2
    count, free = len(rows), bins - 1
    return stats.f.sf(squared * (count - free) / (free * (count - 1)), free, count - free), covariance


@pytest.mark.parametrize(
    ("molar_mass", "exponent"),
    [(ELECTRON_U, -0.5), (ELECTRON_U, 0.0), (100 * ELECTRON_U, 0.0)],
    ids=["constant nu, m/M=1", "hard sphere, m/M=1", "hard sphere, m/M=0.01"],
)
def test_thermal_equilibrium(seed, molar_mass, exponent):
    """Without a field: a Maxwellian at the gas's temperature whatever the collisions and masses.

    The start distribution is the Maxwellian already; collisions must keep it (detailed balance of two-body scattering).
    """
    mixture = model(molar_mass, power_law("elastic", 6e-20, exponent), temperature_K=1000.0)
    thermal_eV = BOLTZMANN * 1000.0 / E_CHARGE
    reducer, rows = cohorts(mixture, 0.0, seed, 40)
    estimates, eedf = estimates_of(reducer, rows)[:2]
    assert_exact(estimates, {"mean_energy": 1.5 * thermal_eV}, {"mean_energy": 4e-3})
    assert estimates["drift_velocity_flux"].value == 0.0
    edges = np.concatenate([eedf.energy_edges_eV, [1e4]])
    shares = maxwellian_shares(edges, thermal_eV)
    lab_bins = reducer.layout.slices["lab"].stop - reducer.layout.slices["lab"].start
    shares = np.concatenate([shares, np.zeros(lab_bins // 2 - len(shares))])
    probability, covariance = chi_squared_of_shares(reducer, rows, shares, 12)
    assert probability > 1e-3
    assert np.sqrt(np.diag(covariance)).max() < 2e-3 / 12 * 10


@pytest.mark.parametrize("molar_mass", [ELECTRON_U, 100 * ELECTRON_U], ids=["m/M=1", "m/M=0.01"])
def test_einstein_relation(seed, molar_mass):
    # At E = 0, D/mu = kT/e; with constant nu the mobility is e (m + M) / (m M nu), so D = kT (m + M) / (m M nu).
    mixture = model(molar_mass, constant_frequency("elastic", NU), temperature_K=1000.0)
    estimates, _ = swarm(mixture, 0.0, seed, 30)
    mass = molar_mass * ATOMIC_MASS
    exact = BOLTZMANN * 1000.0 * (E_MASS + mass) / (E_MASS * mass * NU)
    names = [f"diffusion_{axis}_times_N_{kind}" for axis in "LT" for kind in ("flux", "bulk")]
    assert_exact(estimates, dict.fromkeys(names, exact), {"diffusion": 0.012})


@pytest.mark.slow
def test_mobility_in_a_weak_field_obeys_the_einstein_relation(seed):
    # Hard spheres, two independent runs: D at E = 0 and mu in a field that heats by less than 0.1 %.
    gas = model(100 * ELECTRON_U, power_law("elastic", 6e-20), temperature_K=1000.0)
    still, _ = swarm(gas, 0.0, seed, 60)
    pulled, _ = swarm(gas, 0.2, seed + 1, 60)
    thermal_eV = BOLTZMANN * 1000.0 / E_CHARGE
    mobility = pulled["mobility_times_N_flux"]
    for axis in "LT":
        diffusion = still[f"diffusion_{axis}_times_N_flux"]
        ratio = diffusion.value / mobility.value
        relative = math.hypot(diffusion.standard_error / diffusion.value, mobility.standard_error / mobility.value)
        assert relative < 0.03
        assert ratio == pytest.approx(thermal_eV, rel=3.5 * relative)


# Closed forms for hard spheres of 6e-20 m2 and 4.002602 u (M. J. Druyvesteyn, Physica 10, 61 (1930); B. Davydov, Phys.
# Z. Sowjetunion 8, 59 (1935); digits from memory) hold for m/M -> 0: field in Td, temperature in K, mean energy in eV,
# drift velocity in m/s, N D_T in 1/(m s).
DAVYDOV = [
    (1.0, 0.0, 0.607962, 5256.84, 2.43775e24),
    (0.01, 300.0, 0.0399967, 225.378, 6.08454e23),
    (0.1, 300.0, 0.0853065, 1439.79, 9.05892e23),
    (3.0, 300.0, 1.84566, 9059.42, 4.24623e24),
]


@pytest.mark.slow
@pytest.mark.parametrize(
    ("field", "temperature", "energy", "drift", "diffusion"),
    DAVYDOV,
)
def test_hard_spheres(seed, field, temperature, energy, drift, diffusion):
    mixture = Mixture({"model-hard-sphere": 1.0}, temperature_K=temperature)
    estimates, _ = swarm(mixture, field, seed, 40)
    exact = {"mean_energy": energy, "drift_velocity_flux": drift, "diffusion_T_times_N_flux": diffusion}
    noise = 0.5 if field < 0.05 else 0.02  # where the drift is small beside the thermal speed
    precision = {"mean_energy": 0.01, "drift": noise, "diffusion": 0.02}
    assert_exact(estimates, exact, precision, theory=1e-3)


@pytest.mark.parametrize(("field", "temperature"), [(1.0, 0.0), (0.3, 1000.0)])
def test_druyvesteyn_and_davydov_distributions(seed, field, temperature):
    """f0 ~ exp(-int de / (kT + c/e)), c = (E/N sigma)^2 M / (6 m); cold: exp(-(e/e0)^2). For m/M -> 0, here 1e-3."""
    mixture = model(1000 * ELECTRON_U, power_law("elastic", 6e-20), temperature_K=temperature)
    kT, c = BOLTZMANN * temperature / E_CHARGE, (field * TOWNSEND / 6e-20) ** 2 * 1000 / 6
    reducer, rows = cohorts(mixture, field, seed, 20)
    estimates, eedf = estimates_of(reducer, rows)[:2]

    def shape(e):
        if kT == 0.0:
            return np.exp(-(e**2) / (2 * c))
        return np.exp(-(e / kT - c / kT**2 * np.log1p(e * kT / c)))

    top = 60 * max(kT, c**0.5)
    norm = 1.0 / integrate.quad(lambda e: shape(e) * math.sqrt(e), 0, top, limit=500)[0]
    mean = norm * integrate.quad(lambda e: shape(e) * e**1.5, 0, top, limit=500)[0]
    # W = (1/3) sqrt(2e/m) int e f1, f1 = -(E/N sigma) df0/de, by parts (1/3) sqrt(2e/m) (E/N sigma) int f0
    drift = SPEED_1_EV / 3 * field * TOWNSEND / 6e-20 * norm * integrate.quad(shape, 0, top, limit=500)[0]
    exact = {"mean_energy": mean, "drift_velocity_flux": drift}
    assert_exact(estimates, exact, {"mean_energy": 0.01, "drift": 0.015}, theory=2e-3)
    f0 = norm * shape(eedf.energy_eV)
    good = (eedf.energy_eV > 0.02 * mean) & (eedf.energy_eV < 3.0 * mean)
    off = (eedf.f0 - f0)[good]
    error = np.hypot(eedf.f0_standard_error, 4e-3 * f0)[good]  # theory: m/M and the width of the bins
    assert np.median(eedf.f0_standard_error[good] / f0[good]) < 0.03
    assert np.mean((off / error) ** 2) < 2.0
    assert abs(off / error).max() < 5.0


HUNDREDFOLD = 100 * ELECTRON_U


@pytest.mark.parametrize(
    ("molar_mass", "ionization", "attachment"),
    [
        (HUNDREDFOLD, 1e-15, 4e-16),
        (HUNDREDFOLD, 0.0, 5e-15),
        (ELECTRON_U, 1e-14, 0.0),
        (ELECTRON_U, 2e-14, 2e-14),
        pytest.param(HUNDREDFOLD, 2e-14, 2e-14, marks=pytest.mark.slow),
    ],
)
def test_constant_ionization_and_attachment_frequencies(seed, molar_mass, ionization, attachment):
    processes = [constant_frequency("elastic", NU)]
    if ionization:
        processes.append(constant_frequency("ionization", ionization, sharing=Sharing("equal")))
    if attachment:
        processes.append(constant_frequency("attachment", attachment))
    estimates, _ = swarm(model(molar_mass, *processes), 50.0, seed, 24)
    exact = constant_frequency_moments(molar_mass, 50.0, 0.0, ionization)
    exact["collision_frequency_over_N"] += ionization + attachment
    exact["net_frequency_over_N"] = ionization - attachment
    exact["ionization_frequency_over_N"], exact["attachment_frequency_over_N"] = ionization, attachment
    exact = {name: value for name, value in exact.items() if value != 0.0}
    precision = {"collision": 1e-3, "net": 2e-3, "ion": 2e-3, "att": 2e-3, "drift": 4e-3, "mean": 4e-3, "diff": 0.015}
    assert_exact(estimates, exact, precision)
    bulk, flux = estimates["drift_velocity_bulk"], estimates["drift_velocity_flux"]
    assert bulk.value == pytest.approx(flux.value, rel=1e-3)


def attachment_by_energy(field, kappa, ratio):
    """Two-term closed forms for constant NU and an attachment cross section kappa x (energy / eV)^(1/2), m/M -> 0.

    For n ~ exp(s z + q x) the function exp(-b e) solves the two-term balance exactly; growth, W and D follow as in
    test_two_term.py, where the derivation stands. strength = kappa T0 / (delta nu), T0 the temperature without
    attachment. The first order in m/M of the elastic part, W = e E (1 + m/M) / (m nu), is put in.
    """
    nu, E, loss = NU / SPEED_1_EV, field * TOWNSEND, 2 * ratio * NU / SPEED_1_EV
    strength = kappa * E**2 / (3 * nu * loss**2)
    root = math.sqrt(1 + 4 * strength)
    temperature = E**2 / (1.5 * nu * loss * (1 + root))  # E / u
    bare = SPEED_1_EV * E / (2 * nu) * (1 + ratio)
    return {
        "mean_energy": 1.5 * temperature,
        "net_frequency_over_N": -SPEED_1_EV * 1.5 * temperature * kappa,
        "drift_velocity_flux": bare,
        "drift_velocity_bulk": bare / root,
        "diffusion_T_times_N_flux": SPEED_1_EV * temperature / (2 * nu),
        "diffusion_T_times_N_bulk": SPEED_1_EV * E**2 / (6 * nu**2 * loss * root),
        "diffusion_L_times_N_bulk": SPEED_1_EV * E**2 / (6 * nu**2 * loss * root**3),
    }


@pytest.mark.parametrize("kappa", [1e-21, 4e-21])
def test_attachment_frequency_proportional_to_energy(seed, kappa):
    ratio = 1e-3
    mixture = model(ELECTRON_U / ratio, constant_frequency("elastic", NU), power_law("attachment", kappa, 0.5))
    exact = attachment_by_energy(5.0, kappa, ratio)
    assert exact["drift_velocity_bulk"] < 0.75 * exact["drift_velocity_flux"]
    estimates, _ = swarm(mixture, 5.0, seed, 40)
    # D_L bulk is a small rest of larger terms.
    precision = {"mean": 5e-3, "net": 5e-3, "drift": 0.015, "diffusion_L_times_N_bulk": 0.12, "diffusion": 0.03}
    assert_exact(estimates, exact, precision, theory=3 * ratio)


@pytest.mark.slow
def test_the_shipped_attachment_model(seed):
    # gases/model-attachment.toml states the factor 0.93 of bulk to flux drift at 10 Td.
    mixture = Mixture({"model-attachment": 1.0})
    exact = attachment_by_energy(10.0, 7e-24, mixture.gases[0].mass_ratio)
    assert exact["drift_velocity_bulk"] / exact["drift_velocity_flux"] == pytest.approx(0.93, abs=0.005)
    estimates, _ = swarm(mixture, 10.0, seed, 40)
    assert_exact(estimates, exact, {"mean": 8e-3, "net": 8e-3, "drift": 8e-3, "diffusion": 0.03}, theory=2e-3)
