"""A naive scalar Monte Carlo of the same swarm, for comparison: nothing here is shared with the kernel.

One electron at a time, a flat majorant over all energies, numba's own random numbers, collision counts for rates,
cold gas. Windows end at common times, where n electrons are drawn at random from those alive. Tests hold its
coefficients against the kernel's; speed measurements take it as the baseline.
"""

import math
from dataclasses import dataclass

import numpy as np
from numba import njit

from swarmgauge.gas import Mixture
from swarmgauge.gas.constants import SPEED_1_EV

UNIT = 1e-20  # m^2; speeds in sqrt(eV), lengths in 1/(N UNIT), as any such code might choose
TIME = 1.0 / (UNIT * SPEED_1_EV)


@dataclass(frozen=True)
class TwinResult:
    """Means over batches with standard errors, SI; rate is the ionization frequency over N; bulk from the centroid."""

    drift: tuple[float, float]
    drift_bulk: tuple[float, float]
    energy: tuple[float, float]
    ionization: tuple[float, float]
    attachment: tuple[float, float]
    diffusion_t: tuple[float, float]
    real_collisions: int
    candidates: int


@njit(error_model="numpy")
def _batch(seed, n, windows, warm, window, a, table, step, majorant, kinds, losses, masses, equal, sums):
    """One batch of `n` electrons; sums: time, path, energy, births, deaths, centroid, x^2 + y^2, real, trials."""
    np.random.seed(seed)
    room = 4 * n + 64
    now = np.zeros((room, 7))  # velocity, position, time left
    new = np.zeros((room, 7))
    for i in range(n):
        for k in range(3):
            now[i, k] = np.random.normal() * 0.5
    alive = n
    processes = table.shape[1]
    sums[:] = 0.0
    for w in range(-warm, windows):
        if w == 0:
            for i in range(n):
                now[i, 3:6] = 0.0
        centre = 0.0
        for i in range(n):
            centre += now[i, 5]
            now[i, 6] = window
        i = 0
        while i < alive:
            vx, vy, vz, x, y, z, left = now[i]
            while left > 0.0:
                t = -math.log(1.0 - np.random.random()) / majorant
                cut = t >= left
                if cut:
                    t = left
                if w >= 0:
                    sums[0] += t
                    sums[1] += (vz + 0.5 * a * t) * t
                    sums[2] += (vx * vx + vy * vy + vz * vz + (vz + a * t / 3.0) * a * t) * t
                x += vx * t
                y += vy * t
                z += (vz + 0.5 * a * t) * t
                vz += a * t
                left -= t
                if cut:
                    break
                if w >= 0:
                    sums[8] += 1
                e = vx * vx + vy * vy + vz * vz
                q = min(e / step, table.shape[0] - 2.0)
                k = int(q)
                f = q - k
                pick = np.random.random() * majorant
                chosen = -1
                for p in range(processes):
                    pick -= table[k, p] + f * (table[k + 1, p] - table[k, p])
                    if pick < 0.0:
                        chosen = p
                        break
                if chosen < 0 or e < losses[chosen]:
                    continue
                if w >= 0:
                    sums[7] += 1
                if kinds[chosen] == 3:
                    if w >= 0:
                        sums[4] += 1
                    left = -1.0
                    break
                e_out = e - losses[chosen]
                if kinds[chosen] == 2:
                    if w >= 0:
                        sums[3] += 1
                    second = 0.5 * e_out if equal else np.random.random() * e_out
                    e_out -= second
                    cos2 = 2.0 * np.random.random() - 1.0
                    phi2 = 2.0 * math.pi * np.random.random()
                    g2 = math.sqrt(second)
                    sin2 = math.sqrt(1.0 - cos2 * cos2)
                    now[alive, 0] = g2 * sin2 * math.cos(phi2)
                    now[alive, 1] = g2 * sin2 * math.sin(phi2)
                    now[alive, 2] = g2 * cos2
                    now[alive, 3] = x
                    now[alive, 4] = y
                    now[alive, 5] = z
                    now[alive, 6] = left
                    alive += 1
                cos1 = 2.0 * np.random.random() - 1.0
                phi1 = 2.0 * math.pi * np.random.random()
                g1 = math.sqrt(e_out)
                sin1 = math.sqrt(1.0 - cos1 * cos1)
                m1 = masses[chosen] / (1.0 + masses[chosen])
                m2 = 1.0 / (1.0 + masses[chosen])
                vx = m1 * vx + m2 * g1 * sin1 * math.cos(phi1)
                vy = m1 * vy + m2 * g1 * sin1 * math.sin(phi1)
                vz = m1 * vz + m2 * g1 * cos1
            if left < 0.0:
                alive -= 1
                now[i] = now[alive]
                continue
            now[i, 0] = vx
            now[i, 1] = vy
            now[i, 2] = vz
            now[i, 3] = x
            now[i, 4] = y
            now[i, 5] = z
            i += 1
        after = 0.0
        for i in range(alive):
            after += now[i, 5]
        if w >= 0:
            sums[5] += after / alive - centre / n
        for i in range(n):  # conservative swarms keep their electrons, others are drawn anew
            source = i if alive == n else np.random.randint(alive)
            new[i] = now[source]
        alive = n
        now, new = new, now
    for i in range(n):
        sums[6] += now[i, 3] ** 2 + now[i, 4] ** 2


class Twin:
    """The naive twin of one gas at T = 0 and one field.

    ceiling_eV : energies above it share the frequencies there; the flat majorant is the largest sum below it.
    window : kernel-free time unit, 1 / (N 1e-20 m^2 593 km/s).
    """

    def __init__(self, mixture: Mixture, field_Td: float, ceiling_eV: float, window: float, cells: int = 4000) -> None:
        grid = np.linspace(0.0, ceiling_eV, cells + 1)
        rows, self.kinds, self.losses, self.masses = [], [], [], []
        self.equal = False
        code = {"elastic": 0, "excitation": 1, "ionization": 2, "attachment": 3}
        for gas, share in zip(mixture.gases, mixture.fractions, strict=True):
            for process in mixture.acting(gas):
                energies = np.maximum(grid, 1e-12)
                rows.append(share * np.sqrt(energies) * process.cross_section(energies) / UNIT)
                self.kinds.append(code[process.kind])
                loss = process.threshold_eV if process.kind in ("excitation", "ionization") else 0.0
                self.losses.append(loss * (1.0 + gas.mass_ratio))
                self.masses.append(gas.mass_ratio)
                self.equal |= process.sharing.kind == "equal"
        self.table = np.ascontiguousarray(np.array(rows).T)
        self.step = grid[1]
        self.majorant = self.table.sum(axis=1).max() * (1.0 + 1e-9)
        self.acceleration = 0.05 * field_Td
        self.window = window

    def batch(self, seed: int, electrons: int, windows: int, warm: int) -> np.ndarray:
        """Sums of one batch; see `_batch`."""
        sums = np.zeros(9)
        _batch(
            seed, electrons, windows, warm, self.window, self.acceleration, self.table, self.step, self.majorant,
            np.array(self.kinds), np.array(self.losses), np.array(self.masses), self.equal, sums,
        )  # fmt: skip
        return sums

    def run(self, seed: int, electrons: int, windows: int, warm: int, batches: int) -> TwinResult:
        """Means over independent batches."""
        rows = np.array([self.batch(seed * 1000 + b, electrons, windows, warm) for b in range(batches)])
        time = rows[:, 0]
        length = windows * self.window

        def mean(values):
            return float(values.mean()), float(values.std(ddof=1) / math.sqrt(batches))

        return TwinResult(
            drift=mean(rows[:, 1] / time * SPEED_1_EV),
            drift_bulk=mean(rows[:, 5] / length * SPEED_1_EV),
            energy=mean(rows[:, 2] / time),
            ionization=mean(rows[:, 3] / time / TIME),
            attachment=mean(rows[:, 4] / time / TIME),
            diffusion_t=mean(rows[:, 6] / (4.0 * electrons * length) * SPEED_1_EV / UNIT),
            real_collisions=int(rows[:, 7].sum()),
            candidates=int(rows[:, 8].sum()),
        )
