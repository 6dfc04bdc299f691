"""Campaigns: run files, their points on all cores, and the results folder that keeps them."""

from importlib import import_module
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from .campaign import Outcome, run_campaign
    from .results import Results, ResultsError, open_results
    from .runfile import RunFile, RunFileError, load_run_file
    from .runfile_model import run_file_schema
    from .store import FolderError

__all__ = [
    "FolderError",
    "Outcome",
    "Results",
    "ResultsError",
    "RunFile",
    "RunFileError",
    "load_run_file",
    "open_results",
    "run_campaign",
    "run_file_schema",
]
_HOME = {
    "FolderError": "store",
    "Outcome": "campaign",
    "Results": "results",
    "ResultsError": "results",
    "RunFile": "runfile",
    "RunFileError": "runfile",
    "load_run_file": "runfile",
    "open_results": "results",
    "run_campaign": "campaign",
    "run_file_schema": "runfile_model",
}


def __getattr__(name: str) -> Any:
    """Load a public name on first use: pydantic and numba are not needed for all of them."""
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f".{_HOME[name]}", __name__), name)
