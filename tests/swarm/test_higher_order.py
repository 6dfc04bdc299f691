"""Third-order transport and the transport of energy against closed forms."""

import math

import pytest
from kernel.model_gases import ELECTRON_U, constant_frequency, model, power_law

from swarm.swarms import assert_exact, swarm
from swarm.test_exact import NU
from swarmgauge.gas.constants import ATOMIC_MASS, E_CHARGE, E_MASS, SPEED_1_EV, TOWNSEND
from swarmgauge.gas.process import Sharing


def moments(molar_mass, field):
    """Third order and energy transport for cold atoms, constant collision frequency NU, isotropic scattering.

    Every moment of velocity and position closes: the average of z^j v_z^k v^l after a collision v' = electron v +
    neutral |v| n, n isotropic, is a combination of moments of the same order (G. H. Wannier, Bell Syst. Tech. J. 32,
    170 (1953)). Setting the rate of change of each central moment to zero gives the next. Names: zz is <v_z^2>, s3 is
    <v_z v^2>, dz_... is <dz ...>, dx_... is <x ...>.
    """
    a, M = E_CHARGE * field * TOWNSEND / E_MASS, molar_mass * ATOMIC_MASS
    e, n = E_MASS / (E_MASS + M), M / (E_MASS + M)
    s = e * e + n * n
    relax_v, relax_v2, relax_zz = NU * n, NU * (1 - s), NU * (1 - e * e)
    relax_s3 = NU * (1 - e * s - 2 * e * n * n / 3)
    w = a / relax_v
    v2 = 2 * a * w / relax_v2
    zz = (2 * a * w + NU * n * n * v2 / 3) / relax_zz
    s3 = a * (v2 + 2 * zz) / relax_s3
    z3 = (3 * a * zz + NU * e * n * n * s3) / (NU * (1 - e**3))
    v4 = 4 * a * s3 / (NU * (1 - s * s - 4 * e * e * n * n / 3))
    relax_zzv2 = NU * (1 - e * e * s - 4 * e * e * n * n / 3)
    zzv2 = (a * (2 * s3 + 2 * z3) + NU * s * n * n / 3 * v4) / relax_zzv2
    along = (zz - w * w) / relax_v  # D_L
    across = (v2 - zz) / 2 / relax_v  # D_T
    dz_v2 = (s3 - w * v2 + 2 * a * along) / relax_v2
    dz_zz = (z3 - w * zz + 2 * a * along + NU * n * n / 3 * dz_v2) / relax_zz
    dz_s3 = (zzv2 - w * s3 + a * (dz_v2 + 2 * dz_zz)) / relax_s3
    dx_xz = ((s3 - z3) / 2 + a * across) / relax_zz
    dx_xv2 = ((v4 - zzv2) / 2 + 2 * a * dx_xz) / relax_s3
    skewness = (dz_zz - 2 * w * along) / relax_v
    return {
        "diffusion_L_times_N_flux": along,
        "diffusion_T_times_N_flux": across,
        "skewness_L_times_N2_flux": skewness,
        "skewness_L_times_N2_bulk": skewness,
        "energy_flux_mobility_times_N": s3 / v2 / (field * TOWNSEND),
        "energy_flux_diffusion_L_times_N": dz_s3 / v2,
        "energy_flux_diffusion_T_times_N": dx_xv2 / v2,
        "energy_loss_coefficient": 0.5 * E_MASS * v2 * relax_v2 / E_CHARGE,
    }


PRECISION = {"skewness": 0.03, "energy_flux_mobility": 2e-3, "energy_flux_diffusion": 0.015, "diffusion": 0.01}


@pytest.mark.parametrize(("molar_mass", "field"), [(ELECTRON_U, 300.0), (100 * ELECTRON_U, 50.0)])
def test_constant_collision_frequency(seed, molar_mass, field):
    estimates, _ = swarm(model(molar_mass, constant_frequency("elastic", NU)), field, seed, 40)
    assert_exact(estimates, moments(molar_mass, field), PRECISION | {"energy_loss": 2e-3})


@pytest.mark.parametrize("gain", [0.0, 5e-15])
def test_constant_attachment_takes_all_alike(seed, gain):
    # All moments stay those of the elastic gas, flux and bulk. With ionization that shares without loss they do not,
    # but flux and bulk of every order stay equal, as the net rate is that of all electrons.
    processes = [constant_frequency("elastic", NU), constant_frequency("attachment", 5e-15)]
    if gain:
        processes.append(constant_frequency("ionization", gain, sharing=Sharing("equal")))
    estimates, _ = swarm(model(ELECTRON_U, *processes), 300.0, seed, 40)
    if not gain:
        exact = moments(ELECTRON_U, 300.0)
        del exact["energy_loss_coefficient"]  # attachment takes energy out of the swarm
        assert_exact(estimates, exact, PRECISION)
    flux, bulk = (estimates[f"skewness_L_times_N2_{kind}"] for kind in ("flux", "bulk"))
    assert bulk.value == pytest.approx(flux.value, rel=2e-3)


def test_bulk_skewness_of_an_attaching_gas(seed):
    """Attachment proportional to energy, m/M -> 0, where bulk and flux differ.

    The growth rate of n ~ exp(s z) is nu(s) = -E u / (2 nu) + const with u^2 / (3 nu) - loss (u + s) / E - kappa = 0
    (derived in test_two_term.py); so Q = -1/6 d3nu/ds3 = E^3 / (9 nu^3 loss^2 root^5), root = du/ds^-1 at s = 0.
    """
    ratio, field, kappa = 1e-2, 5.0, 1e-19
    nu, E = NU / SPEED_1_EV, field * TOWNSEND
    loss = 2 * ratio * nu
    root = math.sqrt(1 + 4 * kappa * E**2 / (3 * nu * loss**2))
    mixture = model(ELECTRON_U / ratio, constant_frequency("elastic", NU), power_law("attachment", kappa, 0.5))
    estimates, _ = swarm(mixture, field, seed, 80)
    exact = {"skewness_L_times_N2_bulk": SPEED_1_EV * E**3 / (9 * nu**3 * loss**2 * root**5)}
    assert_exact(estimates, exact, {"skewness": 0.05}, theory=3 * ratio)
    flux = estimates["skewness_L_times_N2_flux"]
    assert flux.value > 4 * exact["skewness_L_times_N2_bulk"]
