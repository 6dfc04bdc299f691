"""Set files: from a TOML file to a Gas. The form is the one that `schema` describes."""

import os
import stat
import tomllib
from pathlib import Path
from typing import Any

import numpy as np
from pydantic import ValidationError

from .errors import InputError, SetFileError, printable
from .faults import form_faults, joined
from .gas import Gas
from .laws import Law, PowerLaw, Ramp, Table
from .process import Process
from .scattering import AngleTable, Forward, Isotropic, Scattering, Screened, ScreenedToRatio
from .schema import (
    AngularEntry,
    EjectedEntry,
    FractionEntry,
    ParameterEntry,
    PowerEntry,
    ProcessEntry,
    SetEntry,
    WidthEntry,
)
from .sharing import Sharing

LARGEST_FILE_BYTES = 16_000_000


def load_set(path: str | os.PathLike[str]) -> Gas:
    """The gas of a set file.

    Processes are put in order of their thresholds. Raises SetFileError with a line for each fault: file, place, what
    was found, what to do.
    """
    content = parse_toml(read_text(Path(path)), path)
    return gas_from_content(content, str(path))


def gas_from_content(content: dict[str, Any], place: str) -> Gas:
    """The gas from the parsed content of a set file; place : how to name the file in a message."""
    try:
        entry = SetEntry.model_validate(content)
    except ValidationError as error:
        lines = form_faults(error, content, lambda path: _place(path, content), SetEntry)
        raise SetFileError(joined(lines, f"{place}, ")) from error
    faults, processes = [], []
    for number, process in enumerate(entry.process):
        try:
            processes.append(_process(process))
        except InputError as error:
            faults.append(f"{_place(('process', number), content)}, {error}")
    if faults:
        raise SetFileError(joined(faults, f"{place}, "))
    try:
        return Gas(
            name=entry.name,
            formula=entry.formula,
            molar_mass_g_per_mol=entry.molar_mass_g_per_mol,
            elastic_is=entry.elastic_is,
            published=tuple(processes),
            source=entry.source,
            rights=entry.rights,
            note=entry.note,
            trusted_E_over_N_Td=_pair(entry.trusted_E_over_N_Td),
            table_temperature_K=entry.table_temperature_K,
        )
    except InputError as error:
        raise SetFileError(f"{place}, {error}") from error


def read_text(path: Path, wanted: str = "a TOML file") -> str:
    """The text of a small UTF-8 file; raises SetFileError, which names what was wanted."""
    try:
        status = path.stat()
        if not stat.S_ISREG(status.st_mode):
            raise SetFileError(f"{path}: is {_what(status.st_mode)}, not a file. Give the path of {wanted}.")
        if status.st_size > LARGEST_FILE_BYTES:
            raise SetFileError(
                f"{path}: has {status.st_size / 1e6:.0f} MB, more than the {LARGEST_FILE_BYTES / 1e6:.0f} MB that are "
                "read. Thin the tables; linear interpolation needs few points."
            )
        return path.read_bytes().decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = error.object[: error.start].count(b"\n") + 1
        raise SetFileError(
            f"{path}, line {line}: byte 0x{error.object[error.start]:02x} is not UTF-8. Save the file as UTF-8."
        ) from error
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        reason = getattr(error, "strerror", None) or str(error)
        raise SetFileError(f"{path}: cannot be read ({reason}). Check the path and its permissions.") from error


def parse_toml(text: str, path: str | os.PathLike[str]) -> dict[str, Any]:
    """The content of a TOML file; raises SetFileError."""
    try:
        return tomllib.loads(text)
    except RecursionError as error:
        raise SetFileError(
            f"{path}: is nested too deeply. A TOML file of this kind has tables in lists only."
        ) from error
    except ValueError as error:  # TOMLDecodeError is one; numbers of thousands of digits are another
        raise SetFileError(f"{path}: is not TOML: {error}. Correct the text there.") from error


def _what(mode: int) -> str:
    return "a folder" if stat.S_ISDIR(mode) else "a device or pipe"


def _place(path: tuple, content: dict[str, Any]) -> str:
    """Words for a place in a set file: process by its id, or by its number where it has none."""
    if len(path) >= 2 and path[0] == "process":
        process = content["process"][path[1]]
        name = process.get("id") if isinstance(process, dict) else None
        named = printable(name) if isinstance(name, str) and name else f"number {path[1] + 1}"
        return ", ".join([f"process {named}", *(str(step) for step in path[2:])])
    return ", ".join(printable(step) for step in path if isinstance(step, str))


def _pair(values: list[float] | None) -> tuple[float, float] | None:
    return None if values is None else (values[0], values[1])


def _process(entry: ProcessEntry) -> Process:
    return Process(
        id=entry.id,
        kind=entry.kind,
        threshold_eV=entry.threshold_eV,
        law=_law(entry),
        label=entry.label,
        source=entry.source,
        sharing=_sharing(entry),
        scattering=_scattering(entry.scattering),
        ejecta=entry.ejecta or "isotropic",
        degeneracy_lower=entry.degeneracy_lower,
        degeneracy_upper=entry.degeneracy_upper,
        lower=entry.lower,
        vibrational=entry.vibrational,
        third_body=entry.third_body,
        passive=entry.passive,
        relative_uncertainty=entry.relative_uncertainty,
    )


def _sharing(entry: ProcessEntry) -> Sharing:
    sharing = entry.sharing
    if isinstance(sharing, FractionEntry):
        return Sharing("fixed", fraction=sharing.fraction)
    if isinstance(sharing, WidthEntry):
        return Sharing("width", width_eV=sharing.width_eV)
    if isinstance(sharing, EjectedEntry):
        return Sharing("table", ejected_eV=np.array(sharing.ejected_eV), density=np.array(sharing.density))
    return Sharing(sharing or "uniform")


def _scattering(entry: str | AngularEntry | None) -> Scattering:
    if not isinstance(entry, AngularEntry):
        return Forward() if entry == "forward" else Isotropic()
    table = [name for name in ("angles_deg", "energy_eV", "shape") if getattr(entry, name) is not None]
    ways = [name for name in ("screened", "momentum_transfer_ratio") if getattr(entry, name) is not None]
    if table:
        ways.append(" with ".join(table))
    if len(ways) != 1 or len(table) not in (0, 3):
        raise SetFileError(
            f"scattering: {', '.join(ways) or 'no law'} is given. Give either screened, or momentum_transfer_ratio, or "
            "angles_deg with energy_eV and shape."
        )
    if entry.momentum_transfer_ratio is not None:
        ratio = entry.momentum_transfer_ratio
        return ScreenedToRatio(np.array(ratio.energy_eV), np.array(ratio.ratio), entry.convert)
    if isinstance(entry.screened, ParameterEntry):
        return Screened(np.array(entry.screened.energy_eV), np.array(entry.screened.parameter), entry.convert)
    if entry.screened is not None:
        return Screened(np.zeros(1), np.array([entry.screened]), entry.convert)
    return AngleTable(entry.angles_deg, entry.energy_eV, entry.shape, entry.convert)  # type: ignore[arg-type]


def _law(entry: ProcessEntry) -> Law:
    table = {name for name in ("energy_eV", "cross_section_m2", "beyond") if getattr(entry, name) is not None}
    ways = [name for name in ("power_law", "ramp") if getattr(entry, name) is not None]
    if table:
        ways.insert(0, " with ".join(name for name in ("energy_eV", "cross_section_m2", "beyond") if name in table))
    if len(ways) != 1:
        found = f"more than one cross section is given ({', '.join(ways)})" if ways else "no cross section is given"
        raise SetFileError(f"{found}. Give either energy_eV, cross_section_m2 and beyond, or power_law, or ramp.")
    if entry.power_law is not None:
        return PowerLaw(entry.power_law.at_1_eV_m2, entry.power_law.exponent)
    if entry.ramp is not None:
        return Ramp(entry.ramp.from_eV, entry.ramp.slope_m2_per_eV)
    if entry.energy_eV is None or entry.cross_section_m2 is None or entry.beyond is None:
        missing = next(name for name in ("energy_eV", "cross_section_m2", "beyond") if name not in table)
        meaning = {
            "beyond": 'what follows the last point ("zero", "hold" or { power = -0.9 })',
            "energy_eV": "the energies of the table, eV",
            "cross_section_m2": "the cross sections of the table, m2",
        }
        raise SetFileError(f'key "{missing}" is missing. Add it: {meaning[missing]}.')
    beyond = entry.beyond.power if isinstance(entry.beyond, PowerEntry) else entry.beyond
    return Table(np.array(entry.energy_eV), np.array(entry.cross_section_m2), beyond)
