"""Which energies a swarm at a given field probes: the range that carries 99 % of each rate, by two-term theory."""

from collections.abc import Iterator
from dataclasses import dataclass

import numpy as np

from swarmgauge.campaign.number import compact
from swarmgauge.campaign.trust import outside
from swarmgauge.gas import Gas, Mixture
from swarmgauge.gas.audit.finding import Finding, percent
from swarmgauge.gas.constants import GAUSS_LEGENDRE, SPEED_1_EV
from swarmgauge.gas.process import Process
from swarmgauge.swarm import Field, solve_two_term
from swarmgauge.swarm.two_term import TwoTerm

TEMPERATURE_K = 293.15
_SHARE = 0.99
_MUCH_OUTSIDE = 0.01


@dataclass(frozen=True)
class Probed:
    """Where the rate of a process comes from.

    rate : m3/s; m6/s for three bodies, which do not act on the swarm. low_eV, middle_eV, high_eV : half a per cent,
    half and all but half a per cent of the rate come from below. beyond : the share from above the end of the table.
    """

    process: str
    three_body: bool
    rate: float
    low_eV: float
    middle_eV: float
    high_eV: float
    beyond: float


@dataclass(frozen=True)
class Probe:
    """All processes of a set at one field, with the mean energy, and what that gives rise to."""

    E_over_N_Td: float
    mean_energy_eV: float
    processes: tuple[Probed, ...]
    findings: tuple[Finding, ...]


def probe(gas: Gas, E_over_N_Td: float) -> Probe:
    """Solve for a gas alone at 293.15 K, three-body processes left out of the swarm but not of the answer.

    Raises InputError where the set has no swarm: no elastic process, or a field that is not possible.
    """
    three_body = [f"{gas.name}/{process.id}" for process in gas.processes if process.third_body is not None]
    mixture = Mixture({gas: 1.0}, temperature_K=TEMPERATURE_K, leave_out=three_body)
    solution = solve_two_term(mixture, E_over_N_Td)
    probed = tuple(_probed(process, solution) for process in gas.processes)
    findings = [*_beyond_tables(probed), *_untrusted(mixture, solution, E_over_N_Td)]
    return Probe(E_over_N_Td, solution.values["mean_energy"], probed, tuple(findings))


def _probed(process: Process, solution: TwoTerm) -> Probed:
    edges = solution.energy_edges_eV
    # f0 is a mean over each cell; tables may bend within one, so Gauss points take part of the detail
    centre, half = 0.5 * (edges[1:] + edges[:-1]), 0.5 * np.diff(edges)
    cell = np.zeros(len(centre))
    outer = np.zeros(len(centre))
    for place, weight in GAUSS_LEGENDRE:
        energy = centre + place * half
        part = weight * half * energy * process.cross_section(energy) * solution.f0
        cell += part
        outer += np.where(energy > process.end_eV, part, 0.0)
    total = float(cell.sum())
    if total == 0.0:
        return Probed(process.id, process.third_body is not None, 0.0, np.nan, np.nan, np.nan, 0.0)
    reached = np.concatenate([[0.0], np.cumsum(cell)]) / total
    tail = 0.5 * (1.0 - _SHARE)
    low, middle, high = np.interp([tail, 0.5, 1.0 - tail], reached, edges)
    return Probed(
        process=process.id,
        three_body=process.third_body is not None,
        rate=SPEED_1_EV * total,
        low_eV=float(low),
        middle_eV=float(middle),
        high_eV=float(high),
        beyond=float(outer.sum()) / total,
    )


def _beyond_tables(probed: tuple[Probed, ...]) -> Iterator[Finding]:
    for one in probed:
        if one.beyond > _MUCH_OUTSIDE:
            yield Finding(
                "doubt",
                "probed energies",
                f"{percent(one.beyond)} of its rate comes from energies above the last point of its table.",
                "There the rule in beyond acts, which is a guess: extend the table.",
                one.process,
                one.low_eV,
                one.high_eV,
            )


def _untrusted(mixture: Mixture, solution: TwoTerm, E_over_N_Td: float) -> Iterator[Finding]:
    for text in outside(mixture, Field(E_over_N_Td=E_over_N_Td)):
        yield Finding("note", "probed energies", text, "Take another set there, or say so with the result.")
    if not solution.converged:
        yield Finding(
            "doubt",
            "probed energies",
            f"the two-term solution at {E_over_N_Td:g} Td has not converged; the ranges are worth little.",
            "Ask at a lower field.",
        )


def probe_lines(probe: Probe) -> Iterator[str]:
    """The ranges as a table of 80 columns."""
    yield (
        f"energies probed at {probe.E_over_N_Td:g} Td, {TEMPERATURE_K:g} K, mean energy "
        f"{probe.mean_energy_eV:.3g} eV (two-term solution):"
    )
    yield f"    {'process':<26}{'rate':>12}{'half below':>14}{'99 % between':>14}{'and':>10}"
    yield f"    {'':<26}{'m3/s':>12}{'eV':>14}{'eV':>14}{'eV':>10}"
    for one in probe.processes:
        if one.rate == 0.0:
            yield f"    {one.process:<26}{'0':>12}"
            continue
        rate = compact(f"{one.rate:.3g}")
        yield f"    {one.process:<26}{rate:>12}{one.middle_eV:>14.3g}{one.low_eV:>14.3g}{one.high_eV:>10.3g}"
    if any(one.three_body for one in probe.processes):
        yield "    Three-body rates are in m6/s and do not act on this swarm."
