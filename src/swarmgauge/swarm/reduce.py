"""From sums of cohorts to coefficients: the formulas, each a function of the mean sums."""

import math
from collections.abc import Mapping
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from swarmgauge.gas.constants import BOLTZMANN, E_CHARGE, SPEED_1_EV, TOWNSEND
from swarmgauge.kernel.history import (
    EFFECTIVE_SIZE,
    END_R,
    END_WEIGHT,
    FAMILIES,
    LAG_SUMS,
    LAG_TT,
    LAG_TT_R,
    LAG_XY_VXY,
    LAG_Z,
    LAG_Z_R,
    LAG_Z_TIME,
    LAG_Z_VZ,
    LAG_ZZ,
    LAG_ZZ_R,
    MEMORIES,
    PATH,
    PATH_ACROSS_SQUARED,
    PATH_SQUARED,
)
from swarmgauge.kernel.lookup import LAB_CELLS, LAB_COARSER, speed_edges

from .bin_means import bin_weights
from .bounds import FEW, bound_of_few, upper_bounds
from .cohort import SumsLayout, layout_of, serial_sum
from .curves import UNIT_CROSS_SECTION_M2, ProcessCurve
from .higher_order import energy_diffusion, skewness_flux, skewness_source
from .maxwellian import MaxwellianRates
from .plan import RATE_UNIT, Plan
from .quantities import in_order, needs_displacements

_NET, _PARTS_OF_NET = "net_frequency_over_N", ("ionization_frequency_over_N", "attachment_frequency_over_N")
SKEWNESS_UNIT = SPEED_1_EV / UNIT_CROSS_SECTION_M2**2  # Q N^2, 1/(m^3 s)
DIFFUSION_UNIT = SPEED_1_EV / UNIT_CROSS_SECTION_M2  # D N, 1/(m s), of one kernel unit


def lab_edges() -> np.ndarray:
    """Edges of the bins of the distribution, speeds, sqrt(eV); shape (LAB_CELLS + 1,)."""
    return speed_edges()[:: 1 << LAB_COARSER]


def lab_edges_eV() -> np.ndarray:
    """The same as energies, eV."""
    return lab_edges() ** 2


@dataclass(frozen=True)
class Reducer:
    """The coefficients of a plan as functions of its sums; every method takes rows of sums and works row by row."""

    plan: Plan

    @property
    def layout(self) -> SumsLayout:
        """Layout of the rows."""
        return layout_of(self.plan)

    def part(self, rows: np.ndarray, name: str) -> np.ndarray:
        """Columns of a name divided by the total time."""
        return rows[:, self.layout.slices[name]] / rows[:, self.layout.slices["time"]]

    def quantities(self, rows: np.ndarray) -> dict[str, np.ndarray]:
        """Quantity name to values, one per row, in the order of output.

        What needs displacements is left out where they are not followed over the whole memory.
        """
        result = {**self.transport(rows), **self.rates(rows)}
        if not self.plan.follows_memory:
            result = {name: value for name, value in result.items() if not needs_displacements(name)}
        result.update(self.maxwellian(result["mean_energy"]))
        result.update(self.power(rows, result))
        return {name: result[name] for name in in_order(result)}

    def distribution(self, rows: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """f0 and f1 on the cells of `lab_edges_eV`, eV^-3/2; shapes (rows, LAB_CELLS).

        Bin means, f0 weighted with sqrt(e) and f1 with e, so that int f0 sqrt(e) de = 1 and
        (1/3) sqrt(2e/m) int e f1 de = W_flux hold for the bins as they are.
        """
        lab = rows[:, self.layout.slices["lab"]].reshape(len(rows), LAB_CELLS, 2)
        total = serial_sum(lab[:, :, 0])[:, None]
        edges = lab_edges_eV()
        root = np.sqrt(edges)
        f0 = lab[:, :, 0] / total / np.diff(edges * root * (2.0 / 3.0))
        f1 = 3.0 * lab[:, :, 1] / total / np.diff(0.5 * edges * edges)
        return f0, f1

    def transport(self, rows: np.ndarray) -> dict[str, np.ndarray]:
        """Mean energy, drift and diffusion, flux and bulk; sums as derived in kernel.history."""
        lags = rows[:, self.layout.slices["lag"]].reshape(len(rows), LAG_SUMS, self.plan.lags)
        lag = lags[:, :, -1]
        point = rows[:, self.layout.slices["point"]]
        time = rows[:, self.layout.slices["time"]][:, 0]
        drift = point[:, PATH] / time
        mean_z = (lag[:, LAG_Z_TIME] + rows[:, self.layout.slices["z_time"]][:, 0]) / time
        diffusion_l = (lag[:, LAG_Z_VZ] + point[:, PATH_SQUARED]) / time - mean_z * drift
        diffusion_t = 0.5 * (lag[:, LAG_XY_VXY] + point[:, PATH_ACROSS_SQUARED]) / time
        rate = point[:, END_R] / point[:, END_WEIGHT]
        growth = rate * self.plan.window_time
        skewness = skewness_flux(lags, point, time, mean_z, drift, diffusion_l, growth)
        bulk = flux = (drift, diffusion_l, diffusion_t, skewness)
        if self.plan.population_changes:
            bulk = (*self._bulk(lag, point, *flux[:3]), skewness + skewness_source(lag, point, rate))
        energy = self.part(rows, "energy")[:, 0]
        result = {"mean_energy": energy, **self._energy_transport(rows, lag, point, energy, flux)}
        field = self.plan.field.E_over_N_Td * TOWNSEND
        for kind, (w, dl, dt, q) in (("flux", flux), ("bulk", bulk)):
            result[f"diffusion_L_times_N_{kind}"] = dl * DIFFUSION_UNIT
            result[f"diffusion_T_times_N_{kind}"] = dt * DIFFUSION_UNIT
            result[f"skewness_L_times_N2_{kind}"] = q * SKEWNESS_UNIT
            if field == 0.0:
                for name in ("drift_velocity", "skewness_L_times_N2"):
                    result[f"{name}_{kind}"] = np.zeros(len(rows))
                continue
            mobility = w * SPEED_1_EV / field
            result[f"drift_velocity_{kind}"] = w * SPEED_1_EV
            result[f"mobility_times_N_{kind}"] = mobility
            result[f"characteristic_energy_T_{kind}"] = dt * DIFFUSION_UNIT / mobility
            result[f"characteristic_energy_L_{kind}"] = dl * DIFFUSION_UNIT / mobility
        return result

    def local_moments(self, rows: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
        """Mean energy and mean v_z, kernel units, from the distribution: for swarms that have no other sums."""
        lab = rows[:, self.layout.slices["lab"]].reshape(len(rows), LAB_CELLS, 2)
        total = serial_sum(lab[:, :, 0])
        return serial_sum(lab[:, :, 0] * bin_weights(lab_edges(), 2, 2)) / total, serial_sum(lab[:, :, 1]) / total

    def _energy_transport(self, rows, lag, point, energy, flux) -> dict[str, np.ndarray]:
        """Mobility and diffusion of the energy flux; <v_z e> from the distribution, as f1."""
        field = self.plan.field.E_over_N_Td * TOWNSEND
        drift, diffusion_l, diffusion_t, _ = flux
        lab = rows[:, self.layout.slices["lab"]].reshape(len(rows), LAB_CELLS, 2)
        moment = serial_sum(lab[:, :, 1] * bin_weights(lab_edges(), 3, 2)) / serial_sum(lab[:, :, 0])
        result = {}
        share = np.ones(len(rows))
        if field > 0.0:
            share = moment / (energy * drift)
            result["energy_flux_mobility_times_N"] = moment / energy * SPEED_1_EV / field
        along, across = energy_diffusion(lag, point, share, diffusion_l, diffusion_t)
        result["energy_flux_diffusion_L_times_N"] = along * DIFFUSION_UNIT
        result["energy_flux_diffusion_T_times_N"] = across * DIFFUSION_UNIT
        return result

    @staticmethod
    def _bulk(lag, point, drift, diffusion_l, diffusion_t):
        """W + Cov(Z, R), D_L + 1/2 <(dZ^2 - <dZ^2>) R> and the like for one transverse direction."""
        weight = point[:, END_WEIGHT]
        rate = point[:, END_R] / weight
        z, zz, z_rate, zz_rate = (lag[:, row] / weight for row in (LAG_Z, LAG_ZZ, LAG_Z_R, LAG_ZZ_R))
        across, across_rate = lag[:, LAG_TT] / weight, lag[:, LAG_TT_R] / weight
        second = zz_rate - 2.0 * z * z_rate + z * z * rate - (zz - z * z) * rate
        return (
            drift + z_rate - z * rate,
            diffusion_l + 0.5 * second,
            diffusion_t + 0.25 * (across_rate - across * rate),
        )

    def rates(self, rows: np.ndarray) -> dict[str, np.ndarray]:
        """Rate of every process per density of its gas, in whatever level, and the frequencies of the mixture."""
        mixture = self.plan.mixture
        per_target = self.part(rows, "rate")
        result = {}
        sums: dict[str, np.ndarray] = {}
        for column, curve in enumerate(self.plan.curves + self.plan.passive_curves):
            rate = per_target[:, column] * RATE_UNIT
            result[self._rate_name(curve)] = self._per_body(curve, rate)
            if column < len(self.plan.curves):
                share = mixture.fractions[curve.gas] * rate
                for key in ("collision", curve.process.kind):
                    sums[key] = sums.get(key, 0.0) + share
        result["collision_frequency_over_N"] = sums["collision"]
        for kind in ("ionization", "attachment"):
            if kind in sums:
                result[f"{kind}_frequency_over_N"] = sums[kind]
        if self.plan.population_changes:
            zero = np.zeros(len(rows))
            result["net_frequency_over_N"] = sums.get("ionization", zero) - sums.get("attachment", zero)
        lab = rows[:, self.layout.slices["lab"]].reshape(len(rows), LAB_CELLS, 2)[:, :, 0]
        mean_speed = serial_sum(lab * bin_weights(lab_edges(), 2, 1)) / serial_sum(lab) * SPEED_1_EV
        result["mean_free_path_times_N"] = mean_speed / sums["collision"]
        return result

    def _rate_name(self, curve: ProcessCurve) -> str:
        return f"{curve.rate_name}{self.plan.mixture.gases[curve.gas].name}/{curve.process.id}"

    def _per_body(self, curve: ProcessCurve, rate: np.ndarray) -> np.ndarray:
        """A rate per density of the target, and of third bodies where the process needs one."""
        if curve.process.third_body is None:
            return rate
        density = self.plan.mixture.body_density_m3(self.plan.mixture.gases[curve.gas], curve.process)
        return rate / density if density > 0.0 else np.zeros_like(rate)

    def maxwellian(self, mean_energy: np.ndarray) -> dict[str, np.ndarray]:
        """Every rate as it would be in a Maxwellian of the same mean energy, (rows,)."""
        mixture = self.plan.mixture
        thermal_eV = mixture.temperature_K * BOLTZMANN / E_CHARGE
        result = {}
        for place, gas in enumerate(mixture.gases):
            curves, averages = self._maxwellian_rates[place]
            frequencies = averages.frequencies(mean_energy + 1.5 * thermal_eV * gas.mass_ratio)
            for column, curve in enumerate(curves):
                rate = self._per_body(curve, frequencies[:, column] * RATE_UNIT)
                result[f"maxwellian_{self._rate_name(curve)}"] = rate
        return result

    @cached_property
    def _maxwellian_rates(self) -> list[tuple[list[ProcessCurve], MaxwellianRates]]:
        """The curves of each gas, and their averages."""
        curves = self.plan.curves + self.plan.passive_curves
        groups = [[curve for curve in curves if curve.gas == place] for place in range(len(self.plan.mixture.gases))]
        return [(group, MaxwellianRates(group)) for group in groups]

    def power(self, rows: np.ndarray, known: dict[str, np.ndarray]) -> dict[str, np.ndarray]:
        """Field heating and where it goes: recoil, thresholds, attached electrons, new electrons.

        What superelastic collisions give is set off against it.
        """
        field = self.plan.field.E_over_N_Td * TOWNSEND
        if field == 0.0:
            return {}
        heating = known["drift_velocity_flux"] * field  # eV m^3/s
        result = {"field_heating_over_N": heating * E_CHARGE}
        rates = self.part(rows, "rate")
        recoil, warm_recoil = self.part(rows, "recoil"), self.part(rows, "warm_recoil")
        attached = self.part(rows, "attached_energy")
        spent = np.zeros(len(rows))
        for column, curve in enumerate(self.plan.curves):
            gas = self.plan.mixture.gases[curve.gas]
            share = self.plan.mixture.fractions[curve.gas]
            if curve.process.kind == "elastic":
                loss = recoil[:, column] + warm_recoil[:, curve.gas]
            elif curve.process.kind == "attachment":
                loss = share * attached[:, column]
            else:
                threshold = -curve.process.threshold_eV if curve.superelastic else curve.process.threshold_eV
                loss = share * threshold * rates[:, column] + recoil[:, column]
            fraction = (-loss if curve.superelastic else loss) * RATE_UNIT / heating
            kind = "gain" if curve.superelastic else "loss"
            result[f"{kind}_fraction:{gas.name}/{curve.process.id}"] = fraction
            spent = spent - fraction if curve.superelastic else spent + fraction
        lost = spent
        if self.plan.population_changes:
            fraction = known["net_frequency_over_N"] * known["mean_energy"] / heating
            result["loss_fraction:population_change"] = fraction
            spent = spent + fraction
        result["energy_loss_coefficient"] = heating * lost
        result["energy_balance_residual"] = 1.0 - spent
        return result

    def upper_bounds(
        self, rows: np.ndarray, known: Mapping[str, float], errors: Mapping[str, float]
    ) -> dict[str, float]:
        """95 % upper bounds of what was never seen or too seldom for an error bar, by name.

        known, errors : value and standard error of every quantity. The time is that of all electrons; where they are
        split, of as many as their weight stands for. A net frequency has one where all that it consists of has.
        """
        windows, alive = (float(rows[:, self.layout.slices[name]].sum()) for name in ("windows", "alive"))
        full = windows * self.plan.electrons
        electron_time = 0.5 * (full + min(alive, full)) * self.plan.window_time
        names = {n: self._rate_name(curve) for n, curve in enumerate(self.plan.curves + self.plan.passive_curves)}
        bounds = {}
        for name, bound in upper_bounds(self.plan, electron_time, names).items():
            value, error = known.get(name, math.nan), errors.get(name, 0.0)
            if value == 0.0:
                bounds[name] = bound
            elif error > FEW * value > 0.0:
                bounds[name] = max(bound_of_few(bound, error / value), value + 2.0 * error)
        parts = [name for name in _PARTS_OF_NET if name in known]
        bounds.pop(_NET, None)
        if _NET in known and all(name in bounds for name in parts):
            bounds[_NET] = max(bounds[name] for name in parts)
        return bounds

    def families(self, rows: np.ndarray) -> tuple[float, float]:
        """Distinct ancestors, one memory ago, of a cohort's electrons, and their effective number; means over all."""
        point = rows[:, self.layout.slices["point"]].sum(axis=0)
        if point[MEMORIES] == 0.0:
            return float("nan"), float("nan")
        return float(point[FAMILIES] / point[MEMORIES]), float(point[EFFECTIVE_SIZE] / point[MEMORIES])

    def time_above_tables(self, rows: np.ndarray) -> dict[str, float]:
        """Share of the time spent above the last tabulated energy, for each process where it is not 0."""
        shares = self.part(rows.sum(axis=0, keepdims=True), "above_end")[0]
        return {
            f"{self.plan.mixture.gases[curve.gas].name}/{curve.process.id}": float(share)
            for curve, share in zip(self.plan.curves + self.plan.passive_curves, shares, strict=True)
            if share > 0.0
        }
