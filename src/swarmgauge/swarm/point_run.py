"""One point on its way: what is still to be computed, and when it is enough."""

import math
import time
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import numpy as np

from swarmgauge.gas import Mixture

from .estimate import Estimate, jackknife
from .field import Field
from .pilot import Pilot, fly_pilot
from .plan import Plan, SpatialGrowth, first_plan, plan_key, solved
from .point import Conditions, EnergyDistribution, Point, TargetStatus
from .quantities import unit_of
from .rare import rare_asked
from .reduce import Reducer, lab_edges_eV
from .spatial import NOT_FOUND, all_bounds, all_quantities, find_growth, spatial_asked, tilted_part
from .targets import parse_accuracy, worst
from .two_term import TwoTerm

FIRST_COHORTS = 20
MOST_FAILURES = 3  # of cohorts after a good pilot; windows are then 64 times shorter
LARGEST_COUNT = 1e9  # of cohorts that is told
FEWEST_COHORTS = 4  # below these the clock cannot stop a point: no error could be stated
LARGEST_TABLE_SHARE = 1e-4  # of the time above the end of a table that goes on unmentioned
SMALL_END = 0.1  # a table that has fallen to this part of its peak has ended, one that has not was cut


def prepare(
    mixture: Mixture, field: Field, seed: int, rare: tuple[str, ...] = (), failures: int = 0, spatial: bool = False
) -> Pilot:
    """Two-term solution and pilot of a point; some tenths of a second, so it is work for the executor.

    failures : as for `fly_pilot`. spatial : whether the spatial growth is wanted too.
    """
    begin = time.thread_time()
    two_term = solved(mixture, field)
    pilot = fly_pilot(first_plan(mixture, field, seed, two_term, rare=rare), failures)
    if spatial and pilot.plan is not None:
        growth, note = find_growth(pilot.plan, two_term.values)
        pilot = replace(pilot, plan=pilot.plan.with_spatial(growth), spatial_note=note)
    return replace(pilot, two_term=two_term, cpu_seconds=time.thread_time() - begin)


def point_key(mixture: Mixture, field: Field, seed: int, accuracy: Mapping[str, Any] | None = None) -> str:
    """The key of the point file: 32 hexadecimal digits.

    Accuracy matters only where it asks for rare processes or for the steady-state Townsend swarm.
    """
    targets = parse_accuracy(accuracy)
    return plan_key(mixture, field, seed, rare_asked(mixture, field, targets), spatial_asked(mixture, field, targets))


class PointRun:
    """A point under way. `drive` feeds it; `result` may be asked for at any time after the first cohorts.

    mixture, field, seed, accuracy : as for `simulate`. max_minutes : of its share of the wall clock, what the point
    would take with all workers to itself. state : of an earlier run of the same key, to go on from.
    """

    def __init__(
        self,
        mixture: Mixture,
        field: Field,
        *,
        seed: int = 1,
        accuracy: Mapping[str, Any] | None = None,
        max_minutes: float = 5.0,
        state: Mapping[str, Any] | None = None,
    ) -> None:
        self.mixture, self.field, self.seed = mixture, field, seed
        self.targets = parse_accuracy(accuracy)
        self.max_minutes = max_minutes
        self.rare = rare_asked(mixture, field, self.targets)
        self.spatial = spatial_asked(mixture, field, self.targets)
        self.key = plan_key(mixture, field, seed, self.rare, self.spatial)
        self.pilot: Pilot | None = None
        self.failures = 0
        self.finished = False
        self.cpu_seconds = 0.0
        self.wall_seconds = 0.0
        self.cpu_seconds_now = 0.0  # without those of the state
        self._wall_seconds_before = 0.0
        self._sums: dict[int, np.ndarray] = {}
        self._wanted = FIRST_COHORTS
        self._point: Point | None = None
        self._two_term: TwoTerm | None = None
        if state is not None:
            self._restore(state)

    # What is to be done

    def missing(self) -> list[int]:
        """Indices of the cohorts that are wanted now and not there; none before the pilot is back."""
        if self.finished or self.pilot is None:
            return []
        return [index for index in range(self._wanted) if index not in self._sums]

    def set_pilot(self, pilot: Pilot) -> None:
        """Take the pilot's answer; without a steady swarm the point is finished."""
        self.pilot = pilot
        self._two_term = pilot.two_term
        if pilot.plan is None:
            self._finish()

    def fail(self, reason: str) -> None:
        """A cohort died out or outgrew its lanes after a good pilot: begin again with shorter windows.

        The cohorts at hand are dropped: those that did not fail would be a biased choice. After too many failures the
        point is finished without a steady swarm.
        """
        if self.finished:
            return
        self.failures += 1
        self._sums.clear()
        self._wanted = FIRST_COHORTS
        self._point = None
        self.pilot = None
        if self.failures > MOST_FAILURES:
            outcome = "extinct" if reason == "extinct" else "runaway"
            note = f"a cohort failed ({reason}) after {MOST_FAILURES} pilots with ever shorter windows"
            self.set_pilot(Pilot(None, outcome, np.zeros(0), note, self._two_term))

    def add(self, index: int, sums: np.ndarray, cpu_seconds: float, workers: int = 1) -> None:
        """Take a cohort; when all that are wanted are there, judge, and ask for as many again if a target is missed.

        A cohort that comes after the end is not taken: what has been handed over stays as it was.
        """
        if self.finished:
            return
        self._sums[index] = sums
        self._point = None
        self.spend(cpu_seconds, workers)
        if not self.finished and not self.missing():  # the clock may have ended it
            if self.worst[1] <= 1.0:
                self._finish()
            else:
                self._wanted *= 2

    def spend(self, cpu_seconds: float, workers: int) -> None:
        """Count the time of a piece of work; finish with what is there if the time of the point is over."""
        self.cpu_seconds += cpu_seconds
        self.cpu_seconds_now += cpu_seconds
        self.wall_seconds += cpu_seconds / workers
        if self.wall_seconds - self._wall_seconds_before > 60.0 * self.max_minutes:
            self.stop()

    def stop(self) -> bool:
        """Finish with what is there, if that is enough to state errors; returns whether this ended the run."""
        if self.finished or self.cohorts < FEWEST_COHORTS:
            return False
        self._finish()
        return True

    def _finish(self) -> None:
        self.finished = True
        self._point = None

    # What is known

    @property
    def cohorts(self) -> int:
        """Cohorts at hand without a gap from the first one: the ones that count."""
        count = 0
        while count in self._sums:
            count += 1
        return count

    @property
    def worst(self) -> tuple[str, float]:
        """The judged quantity furthest from its target, and its error over the target; ("", nan) at first."""
        if self.cohorts < 2 or self.pilot is None or self.pilot.plan is None:
            return "", math.nan
        return self.result().worst

    @property
    def seconds_left(self) -> float:
        """CPU time until the targets are met, by the present errors; NaN as long as nothing can be told, 0 at the end.

        Errors fall with the root of the cohorts, which come in rounds of 20, 40, 80, ...
        """
        if self.finished:
            return 0.0
        count, (_, excess) = self.cohorts, self.worst
        if count < 2 or self.cpu_seconds == 0.0:
            return math.nan
        total = FIRST_COHORTS
        while total < min(count * excess**2, LARGEST_COUNT):
            total *= 2
        return (max(total, self._wanted) - count) * self.cpu_seconds / count

    def state(self) -> dict[str, Any]:
        """All that is needed to go on later: sums of every cohort and what the pilot decided."""
        count = self.cohorts
        pilot = self.pilot
        state: dict[str, Any] = {
            "cpu_seconds": self.cpu_seconds,
            "wall_seconds": self.wall_seconds,
            "failures": self.failures,
            "outcome": pilot.outcome if pilot else "",
            "note": pilot.note if pilot else "",
            "stretch_energies": pilot.stretch_energies if pilot else np.zeros(0),
            "spatial_note": pilot.spatial_note if pilot else "",
        }
        if pilot and pilot.plan:
            plan = pilot.plan
            state |= {
                "window_time": plan.window_time,
                "electrons": plan.electrons,
                "lags": plan.lags,
                "memory_windows": plan.memory_windows,
                "relaxation_windows": plan.relaxation_windows,
                "measured_windows": plan.measured_windows,
                "start_edges_eV": plan.start_edges_eV,
                "start_cumulated": plan.start_cumulated,
                **({} if plan.target_weight is None else {"target_weight": plan.target_weight}),
                **({} if plan.spatial is None else {"alpha": plan.spatial.alpha, "lever": plan.spatial.lever}),
                "sums": np.array([self._sums[index] for index in range(count)]),
            }
        return state

    def _restore(self, state: Mapping[str, Any]) -> None:
        if not state["outcome"]:
            return
        plan = None
        self.cpu_seconds, self.wall_seconds = state["cpu_seconds"], state["wall_seconds"]
        self.failures = int(state["failures"])
        self._wall_seconds_before = self.wall_seconds
        if state["outcome"] == "steady":
            plan = Plan(
                self.mixture,
                self.field,
                self.seed,
                int(state["electrons"]),
                int(state["lags"]),
                float(state["window_time"]),
                state["start_edges_eV"],
                state["start_cumulated"],
                int(state["relaxation_windows"]),
                int(state["measured_windows"]),
                rare=self.rare,
                target_weight=state.get("target_weight"),
                memory_windows=int(state["memory_windows"]),
                spatial=SpatialGrowth(state["alpha"], state["lever"]) if "alpha" in state else None,
            )
            self._sums = dict(enumerate(state["sums"]))
        self.set_pilot(
            Pilot(
                plan,
                state["outcome"],
                state["stretch_energies"],
                state["note"],
                spatial_note=state["spatial_note"],
            )
        )
        if plan is None:
            return
        while self._wanted < len(self._sums):
            self._wanted *= 2
        if len(self._sums) == self._wanted and self.worst[1] <= 1.0:
            self._finish()
        elif len(self._sums) == self._wanted:
            self._wanted *= 2

    # The result

    def result(self) -> Point:
        """The point as far as it is known."""
        if self._point is None:
            self._point = self._build()
        return self._point

    def _build(self) -> Point:
        if self._two_term is None:
            self._two_term = solved(self.mixture, self.field)
        if self.pilot is None or self.pilot.plan is None or self.cohorts < 2:
            return self._without_swarm()
        reducer = Reducer(self.pilot.plan)
        rows = np.array([self._sums[index] for index in range(self.cohorts)])
        estimates, eedf, deviations = estimates_of(reducer, rows)
        spatial = reducer.plan.spatial is not None
        judged = worst(self.targets, estimates, self.field.E_over_N_Td)
        name, excess = max(((n, e) for n, (_, e) in judged.items()), key=lambda pair: pair[1], default=("", 0.0))
        reached = excess <= 1.0 and not self._growth_not_found
        status = "done" if reached else ("target missed" if self.finished else "interrupted")
        above = reducer.time_above_tables(rows)
        ancestors, effective_size = reducer.families(rows)
        return Point(
            conditions=Conditions(self.mixture, self.field, self.seed),
            estimates=estimates,
            eedf=eedf,
            sst_eedf=energy_distribution(*tilted_part(reducer, rows)) if spatial else None,
            two_term=self._two_term.values,
            targets={n: TargetStatus(str(target), e <= 1.0, e) for n, (target, e) in judged.items()},
            warnings=self._warnings(above),
            status=status,
            cohorts=self.cohorts,
            worst=(name, excess),
            wall_seconds=self.wall_seconds,
            cpu_seconds=self.cpu_seconds,
            relaxation=f"{self.pilot.plan.relaxation_windows} windows cut: {self.pilot.note}",
            above_tables=above,
            deviations=deviations,
            ancestors=ancestors,
            effective_size=effective_size,
        )

    @property
    def _growth_not_found(self) -> bool:
        """Whether targets on the steady-state Townsend swarm cannot be judged, though nothing says that it is not."""
        pilot = self.pilot
        return self.spatial and pilot is not None and pilot.plan is not None and pilot.spatial_note == NOT_FOUND

    def _warnings(self, above: dict[str, float]) -> tuple[str, ...]:
        lines = []
        if self.spatial and self.pilot and self.pilot.plan and self.pilot.plan.spatial is None:
            lines.append(f"no steady-state Townsend coefficients: {self.pilot.spatial_note}")
        if self.pilot and self.pilot.plan and not self.pilot.plan.follows_memory:
            lines.append(
                "attachment is so strong that displacements cannot be followed long enough: no diffusion and no bulk "
                "coefficients are given"
            )
        noted = sorted(((s, n) for n, s in above.items() if s > LARGEST_TABLE_SHARE and self._is_cut(n)), reverse=True)
        if noted:
            shown = ", ".join(f"{name} {100 * share:.2g} %" for share, name in noted[:3])
            more = f" and {len(noted) - 3} more" if len(noted) > 3 else ""
            lines.append(f"time spent above the end of a table: {shown}{more}")
        if 0 < self.cohorts < FIRST_COHORTS:
            lines.append(
                f"only {self.cohorts} of at least {FIRST_COHORTS} cohorts: errors are rough; allow more minutes"
            )
        return tuple(lines)

    def _is_cut(self, name: str) -> bool:
        """Whether the table of a process, <set>/<process>, ends while its cross section is still large."""
        gas = next(gas for gas in self.mixture.gases if name.startswith(f"{gas.name}/"))
        process = gas.process(name.removeprefix(f"{gas.name}/"))
        values = process.cross_section(process.breakpoints_eV[process.breakpoints_eV <= process.end_eV])
        return bool(values[-1] > SMALL_END * values.max())

    def _without_swarm(self) -> Point:
        """A point with no estimates: no steady swarm, or not yet any cohorts."""
        outcome = self.pilot.outcome if self.pilot else ""
        status = outcome if outcome in ("runaway", "extinct") else "interrupted"
        note = (
            (f"{outcome}: {self.pilot.note}; no coefficients are given",) if self.pilot and outcome != "steady" else ()
        )
        empty = np.zeros(0)
        assert self._two_term is not None
        return Point(
            conditions=Conditions(self.mixture, self.field, self.seed),
            estimates={},
            eedf=EnergyDistribution(np.zeros(1), empty, empty, empty, empty),
            two_term=self._two_term.values,
            targets={},
            warnings=note,
            status=status,
            cohorts=0,
            worst=("", math.nan),
            wall_seconds=self.wall_seconds,
            cpu_seconds=self.cpu_seconds,
        )


def estimates_of(reducer: Reducer, rows: np.ndarray) -> tuple[dict[str, Estimate], EnergyDistribution, np.ndarray]:
    """Estimates, energy distribution and jackknife deviations from the sums of cohorts, (cohorts, columns)."""
    names = list(all_quantities(reducer, rows[:1]))
    values, errors, deviations = jackknife(
        lambda sums: np.stack(list(all_quantities(reducer, sums).values()), axis=1), rows
    )
    known = dict(zip(names, values.tolist(), strict=True))
    bounds = all_bounds(reducer, rows, known, dict(zip(names, errors.tolist(), strict=True)))
    estimates = {}
    for place, name in enumerate(names):
        bound = bounds.get(name, math.nan)
        error = math.nan if name in bounds else float(errors[place])
        signed = name in ("net_frequency_over_N", "townsend_effective_over_N")
        estimates[name] = Estimate(known[name], error, unit_of(name), len(rows), bound, signed)
    return estimates, energy_distribution(reducer, rows), deviations


def energy_distribution(reducer: Reducer, rows: np.ndarray) -> EnergyDistribution:
    """The energy distribution with its errors; empty bins above the fastest electron are left out."""
    values, errors, _ = jackknife(lambda sums: np.concatenate(reducer.distribution(sums), axis=1), rows)
    bins = len(values) // 2
    filled = int(np.flatnonzero(values[:bins])[-1]) + 1
    f0, f1 = slice(0, filled), slice(bins, bins + filled)
    return EnergyDistribution(lab_edges_eV()[: filled + 1], values[f0], errors[f0], values[f1], errors[f1])
