"""Electron swarms in gases: coefficients, distributions and their errors from cross sections."""

from importlib import import_module
from typing import Any

_HOME = {
    "Emission": "swarm",
    "Estimate": "swarm",
    "Field": "swarm",
    "Gas": "gas",
    "Mixture": "gas",
    "Process": "gas",
    "critical_field": "swarm",
    "load_set": "gas",
    "open_results": "campaign",
    "saturation_pressure_Pa": "gas",
    "simulate": "swarm",
    "simulate_relaxation": "swarm",
    "simulate_difference": "swarm",
    "two_term_sensitivities": "swarm",
    "water_fraction": "gas",
}
__all__ = sorted(_HOME)
__version__ = "0.1.0"


def __getattr__(name: str) -> Any:
    """Load a public name on first use, so that ``swarmgauge --help`` needs neither numba nor scipy."""
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f".{_HOME[name]}", __name__), name)


def __dir__() -> list[str]:
    """The public names, for those who complete them at a prompt."""
    return [*__all__, "__version__"]
