"""From tables to coefficients: cohorts of electrons, their sums, and estimates with errors.

`simulate` computes one point; `PointRun` and `drive` do the same for many points over one executor.
"""

from importlib import import_module
from typing import Any

_HOME = {
    "EnergyDistribution": "point",
    "Emission": "cathode",
    "Estimate": "estimate",
    "Field": "field",
    "Point": "point",
    "PointRun": "point_run",
    "critical_field": "critical",
    "drive": "schedule",
    "parse_accuracy": "targets",
    "point_key": "point_run",
    "simulate": "schedule",
    "simulate_relaxation": "cathode",
    "simulate_difference": "difference",
    "solve_two_term": "two_term",
    "two_term_sensitivities": "two_term_sensitivity",
}
__all__ = sorted(_HOME)


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f".{_HOME[name]}", __name__), name)
