"""Third-order transport, and the transport of energy: formulas of the sums of `kernel.history`.

Third order: the density obeys dn/dt = R n - W dn/dz + D_L d2n/dz2 - Q d3n/dz3, and the flux of electrons is
W n - D_L dn/dz + Q d2n/dz2. Moments of both, with dz = z - <z> (hierarchy: K. Kumar, H. R. Skullerud and R. E. Robson,
Aust. J. Phys. 33, 343 (1980); derived in DEVELOPERS.md), give

    Q_flux = 1/2 [<dz^2 v_z> - <dz^2> W_flux]
    Q_bulk = 1/6 d<dz^3>/dt = Q_flux + 1/6 [<dz^3 R> - <dz^3><R> - 3 <dz^2> Cov(z, R)].

Energy: the flux of energy is n mu_e <e> E - D_e grad(n <e>), mu_e = <v_z e>/(E <e>) and D_e = Cov(z, v_z e)/<e>.
All functions take columns of sums, (rows,) each unless said, in kernel units, and return kernel units.
"""

from swarmgauge.kernel.history import (
    END_ENERGY,
    END_ENERGY_VZ,
    END_VZ,
    END_WEIGHT,
    END_XY_ENERGY_VXY,
    END_XY_VXY,
    END_Z_ENERGY_VZ,
    END_Z_VZ,
    END_ZZZ,
    END_ZZZ_R,
    LAG_Z,
    LAG_Z_R,
    LAG_ZZ,
    LAG_ZZ_R,
    PATH_ZZ_VZ,
)


def skewness_flux(lags, point, time, mean_z, drift, diffusion, growth):
    """Q_flux from time averages over the windows.

    lags : (rows, LAG_SUMS, k) at all k lags; point : (rows, POINT_SUMS); mean_z, drift, diffusion : <Z>, W and D_L of
    the flux; growth : net rate x length of a window. Z reaches back k windows and a part s of the present one. <Z> and
    the variance of Z rise linearly with s, from what stands at window ends for k lags, as they do from k - 1 to k lags.
    Over a window whose population grows by exp(x), s has the mean 1/2 + x/12 - x^3/720 and the variance 1/12 - x^2/240.
    """
    weight = point[:, END_WEIGHT]
    (first, shorter), (second, second_shorter) = (
        (lags[:, row, -1] / weight, lags[:, row, -2] / weight) for row in (LAG_Z, LAG_ZZ)
    )
    variance, shorter_variance = second - first * first, second_shorter - shorter * shorter
    mean_s = 0.5 + growth / 12.0 - growth * growth * growth / 720.0
    spread = 1.0 / 12.0 - growth * growth / 240.0
    mean_variance = variance + mean_s * (variance - shorter_variance)
    mean_square = mean_variance + mean_z * mean_z + (first - shorter) * (first - shorter) * spread
    return 0.5 * (point[:, PATH_ZZ_VZ] / time - mean_square * drift - 2.0 * mean_z * diffusion)


def skewness_source(lag, point, rate):
    """Q_bulk - Q_flux; lag : (rows, LAG_SUMS) at the longest lag; rate : <R>."""
    weight = point[:, END_WEIGHT]
    z, zz, z_rate, zz_rate = (lag[:, row] / weight for row in (LAG_Z, LAG_ZZ, LAG_Z_R, LAG_ZZ_R))
    zzz, zzz_rate = point[:, END_ZZZ] / weight, point[:, END_ZZZ_R] / weight
    third = zzz - 3.0 * z * zz + 2.0 * z * z * z
    third_rate = zzz_rate - 3.0 * z * zz_rate + 3.0 * z * z * z_rate - z * z * z * rate
    return (third_rate - third * rate - 3.0 * (zz - z * z) * (z_rate - z * rate)) / 6.0


def energy_diffusion(lag, point, share, diffusion_l, diffusion_t):
    """D_e along and across, from the population at window ends.

    These see far fewer velocities than time averages do. But Cov(Z, v) at window ends has a like error, and its true
    value is the flux diffusion, known better: its deviation from that, times `share`, is taken off, which leaves the
    expectation as it is (a control variate). share : close to the ratio of the two, such as mu_e / mu.
    """
    weight = point[:, END_WEIGHT]
    energy = point[:, END_ENERGY] / weight
    z = lag[:, LAG_Z] / weight
    along = (point[:, END_Z_ENERGY_VZ] - z * point[:, END_ENERGY_VZ]) / weight / energy
    across = 0.5 * point[:, END_XY_ENERGY_VXY] / weight / energy
    along_v = (point[:, END_Z_VZ] - z * point[:, END_VZ]) / weight
    across_v = 0.5 * point[:, END_XY_VXY] / weight
    return along - share * (along_v - diffusion_l), across - share * (across_v - diffusion_t)
