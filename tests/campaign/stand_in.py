"""A swarm in place of the real one, for tests of what surrounds it: values at once, and a count of the work done."""

import hashlib
import json
import math
from types import SimpleNamespace

import numpy as np

from swarmgauge.swarm.estimate import Estimate
from swarmgauge.swarm.targets import parse_accuracy, worst

BATCH = 20
WORK = {"cohorts": 0}


def stand_in_key(mixture, field, seed, accuracy=None):
    text = json.dumps([mixture.canonical(), field.E_over_N_Td, seed], sort_keys=True)
    return hashlib.sha256(text.encode()).hexdigest()[:32]


class StandInRun:
    """Errors fall with the root of the cohorts: 2 % of each value after 20 of them, and 0.5 % after 320."""

    def __init__(self, mixture, field, *, seed=1, accuracy=None, max_minutes=5.0, state=None):
        self.mixture, self.field, self.seed, self.max_minutes = mixture, field, seed, max_minutes
        self.targets = parse_accuracy(accuracy)
        self.key = stand_in_key(mixture, field, seed)
        self.sums = np.zeros(0) if state is None else state["sums"]

    @property
    def cohorts(self):
        return len(self.sums)

    @property
    def estimates(self):
        error = 0.02 * (BATCH / max(self.cohorts, 1)) ** 0.5
        field = self.field.E_over_N_Td
        values = {
            "drift_velocity_flux": (1e3 * field, "m/s"),
            "drift_velocity_bulk": (1.1e3 * field, "m/s"),
            "diffusion_L_times_N_flux": (1e24, "1/(m s)"),
            "diffusion_T_times_N_flux": (1.5e24, "1/(m s)"),
            "mean_energy": (0.05 * field, "eV"),
            "ionization_frequency_over_N": (1e-20 * field, "m^3/s"),
            "attachment_frequency_over_N": (1e-18, "m^3/s"),
            "net_frequency_over_N": (1e-20 * field - 1e-18, "m^3/s"),
        }
        return {name: Estimate(value, error * abs(value), unit, self.cohorts) for name, (value, unit) in values.items()}

    @property
    def judged(self):
        return worst(self.targets, self.estimates, self.field.E_over_N_Td)

    @property
    def worst(self):
        name = max(self.judged, key=lambda quantity: self.judged[quantity][1])
        return name, self.judged[name][1]

    @property
    def finished(self):
        return self.cohorts > 0 and self.worst[1] <= 1

    def advance(self):
        WORK["cohorts"] += BATCH
        self.sums = np.concatenate([self.sums, np.full(BATCH, self.field.E_over_N_Td)])

    def state(self):
        return {"sums": self.sums, "cohorts": self.cohorts, "note": "stand-in"}

    def result(self):
        edges = np.array([0.0, 1.0, 4.0])
        f0 = np.array([0.8, 0.05])
        return SimpleNamespace(
            conditions=SimpleNamespace(mixture=self.mixture, field=self.field, seed=self.seed),
            estimates=self.estimates,
            eedf=SimpleNamespace(
                energy_edges_eV=edges, f0=f0, f0_standard_error=0.01 * f0, f1=0.1 * f0, f1_standard_error=0.02 * f0
            ),
            two_term={"mean_energy": 0.05 * self.field.E_over_N_Td},
            targets={
                name: SimpleNamespace(target=str(target), reached=excess <= 1, relative_miss=excess)
                for name, (target, excess) in self.judged.items()
            },
            warnings=(),
            relaxation="",
            ancestors=math.nan,
            effective_size=math.nan,
            above_tables={},
            status="done" if self.worst[1] <= 1 else "target missed" if self.finished else "interrupted",
            cohorts=self.cohorts,
            worst=self.worst,
            wall_seconds=0.5,
            cpu_seconds=1.0,
        )


def stand_in_drive(runs, executor, *, workers, max_minutes=None, on_progress=None, on_finished=None):
    """Each run after the other until its targets are met."""
    for run in runs:
        while not run.finished:
            executor.submit(run.advance).result()
            if on_progress:
                on_progress(run)
        if on_finished:
            on_finished(run)


def install(monkeypatch):
    """Let campaigns use the stand-in."""
    from swarmgauge.campaign import campaign, summary

    WORK["cohorts"] = 0
    monkeypatch.setattr(campaign, "PointRun", StandInRun)
    monkeypatch.setattr(campaign, "drive", stand_in_drive)
    for module in (campaign, summary):
        monkeypatch.setattr(module, "point_key", stand_in_key)
