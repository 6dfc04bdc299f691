"""Cross-section sets of gases, their processes, and mixtures of them."""

from importlib import import_module
from typing import TYPE_CHECKING, Any

from .errors import InputError, MixtureError, ProcessError, SetFileError

if TYPE_CHECKING:
    from .audit.audit import check_set
    from .audit.finding import Finding
    from .gas import Gas
    from .humidity import saturation_pressure_Pa, water_fraction
    from .laws import PowerLaw, Ramp, Table
    from .library import load_named, load_named_or_path, shipped_sets
    from .mixture import Mixture
    from .process import Process
    from .scattering import AngleTable, Forward, Isotropic, Screened, ScreenedToRatio
    from .schema import set_file_schema
    from .setfile import load_set
    from .sharing import Sharing
    from .writer import set_text, write_set

__all__ = [
    "AngleTable",
    "Finding",
    "Forward",
    "Gas",
    "InputError",
    "Isotropic",
    "Mixture",
    "MixtureError",
    "PowerLaw",
    "Process",
    "ProcessError",
    "Ramp",
    "Screened",
    "ScreenedToRatio",
    "SetFileError",
    "Sharing",
    "Table",
    "check_set",
    "load_named",
    "load_named_or_path",
    "load_set",
    "saturation_pressure_Pa",
    "set_file_schema",
    "set_text",
    "shipped_sets",
    "water_fraction",
    "write_set",
]
_HOME = {
    "AngleTable": "scattering",
    "Finding": "audit.finding",
    "Forward": "scattering",
    "Gas": "gas",
    "Isotropic": "scattering",
    "Mixture": "mixture",
    "PowerLaw": "laws",
    "Process": "process",
    "Ramp": "laws",
    "Screened": "scattering",
    "ScreenedToRatio": "scattering",
    "Sharing": "sharing",
    "Table": "laws",
    "check_set": "audit.audit",
    "load_named": "library",
    "load_named_or_path": "library",
    "load_set": "setfile",
    "saturation_pressure_Pa": "humidity",
    "set_file_schema": "schema",
    "set_text": "writer",
    "shipped_sets": "library",
    "water_fraction": "humidity",
    "write_set": "writer",
}


def __getattr__(name: str) -> Any:
    """Load a public name on first use: numpy and pydantic are not needed for the errors alone."""
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(f".{_HOME[name]}", __name__), name)
