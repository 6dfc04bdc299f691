"""From a Gas to the text of a set file, which reads back to the same bits."""

import os
from collections.abc import Iterable, Mapping
from pathlib import Path
from typing import Any

import numpy as np
import tomli_w

from .errors import SetFileError
from .gas import Gas
from .laws import PowerLaw, Ramp, Table
from .process import Process
from .scattering import AngleTable, Isotropic, Scattering, Screened, ScreenedToRatio
from .sharing import Sharing

_NUMBERS_PER_LINE = 8


def set_text(gas: Gas) -> str:
    """The text of the set file of a gas, with the elastic cross section as published; ends with a new line."""
    trusted = gas.trusted_E_over_N_Td
    top = {
        "name": gas.name,
        "formula": gas.formula,
        "molar_mass_g_per_mol": gas.molar_mass_g_per_mol,
        "elastic_is": gas.elastic_is,
        "source": gas.source,
        "rights": gas.rights,
        "note": gas.note,
        "trusted_E_over_N_Td": None if trusted is None else _inline_list(trusted),
        "table_temperature_K": gas.table_temperature_K,
    }
    return "\n".join([_lines(top), *map(process_text, gas.published)])


def process_text(process: Process) -> str:
    """The text of one process in a set file; ends with a new line."""
    return "[[process]]\n" + _lines(_entries(process))


def write_set(gas: Gas, path: str | os.PathLike[str]) -> None:
    """Write a set file; raises SetFileError where there is one already or it cannot be written."""
    try:
        with Path(path).open("x", encoding="utf-8", newline="\n") as file:
            file.write(set_text(gas))
    except FileExistsError as error:
        raise SetFileError(f"{path}: exists already and is not overwritten. Choose another name.") from error
    except OSError as error:
        raise SetFileError(f"{path}: cannot be written ({error.strerror}). Check the folder.") from error


class _Raw(str):
    """TOML text of a value, as it shall stand in the file."""


def _entries(process: Process) -> dict[str, Any]:
    """Keys and values of one process, in the order of the format; None where the default holds."""
    return {
        "id": process.id,
        "kind": process.kind,
        "threshold_eV": process.threshold_eV,
        "label": process.label,
        "source": process.source,
        **_law(process),
        "scattering": _scattering(process.scattering),
        "sharing": _sharing(process.sharing),
        "ejecta": None if process.ejecta == "isotropic" else process.ejecta,
        "degeneracy_lower": process.degeneracy_lower,
        "degeneracy_upper": process.degeneracy_upper,
        "lower": process.lower,
        "vibrational": True if process.vibrational else None,
        "third_body": _inline_table(process.third_body) if isinstance(process.third_body, dict) else process.third_body,
        "passive": True if process.passive else None,
        "relative_uncertainty": process.relative_uncertainty,
    }


def _law(process: Process) -> dict[str, Any]:
    law = process.law
    if isinstance(law, PowerLaw):
        return {"power_law": _inline_table({"at_1_eV_m2": law.at_1_eV_m2, "exponent": law.exponent})}
    if isinstance(law, Ramp):
        return {"ramp": _inline_table({"from_eV": law.from_eV, "slope_m2_per_eV": law.slope_m2_per_eV})}
    return {
        "energy_eV": _column(law.energy_eV),
        "cross_section_m2": _column(law.cross_section_m2),
        "beyond": _beyond(law),
    }


def _beyond(law: Table) -> str:
    return law.beyond if isinstance(law.beyond, str) else _inline_table({"power": law.beyond})


def _sharing(sharing: Sharing) -> str | None:
    if sharing.kind == "fixed":
        return _inline_table({"fraction": sharing.fraction})
    if sharing.kind == "width":
        return _inline_table({"width_eV": sharing.width_eV})
    if sharing.kind == "table":
        return _inline({"ejected_eV": _column(sharing.ejected_eV), "density": _column(sharing.density)})
    return None if sharing.kind == "uniform" else sharing.kind


def _scattering(law: Scattering) -> str | None:
    if isinstance(law, Isotropic):
        return None
    entries: dict[str, str] = {}
    if isinstance(law, AngleTable):
        rows = "".join(f"  {_inline_list(row)},\n" for row in law.shape)
        entries = {"angles_deg": _column(law.angles_deg), "energy_eV": _column(law.energy_eV), "shape": f"[\n{rows}]"}
    elif isinstance(law, ScreenedToRatio):
        table = {"energy_eV": _column(law.energy_eV), "ratio": _column(law.ratio)}
        entries = {"momentum_transfer_ratio": _inline(table)}
    elif isinstance(law, Screened):
        table = {"energy_eV": _column(law.energy_eV), "parameter": _column(law.parameter)}
        constant = len(law.energy_eV) == 1 and law.energy_eV[0] == 0.0
        entries = {"screened": _digits(law.parameter[0]) if constant else _inline(table)}
    else:
        return "forward"
    return _inline(entries | ({"convert": "true"} if law.convert else {}))


def _lines(entries: dict[str, Any]) -> str:
    return "".join(f"{key} = {_value(value)}\n" for key, value in entries.items() if value is not None)


def _value(value: Any) -> str:
    if isinstance(value, _Raw):
        return value
    if isinstance(value, float):
        return _digits(value)
    return tomli_w.dumps({"_": value}).removeprefix("_ = ").rstrip("\n")


def _digits(value: float) -> str:
    """The shortest digits that give the same number; whole numbers without a fraction."""
    text = repr(float(value))
    return text[:-2] if text.endswith(".0") and text != "-0.0" else text


def _column(values: np.ndarray) -> _Raw:
    """A list of numbers, the same number of them in every line, so that two columns can be read side by side."""
    digits = [_digits(value) for value in values.tolist()]
    lines = [", ".join(digits[i : i + _NUMBERS_PER_LINE]) for i in range(0, len(digits), _NUMBERS_PER_LINE)]
    if len(lines) == 1:
        return _Raw(f"[{lines[0]}]")
    return _Raw("[\n" + "".join(f"  {line},\n" for line in lines) + "]")


def _inline_list(values: Iterable[float]) -> _Raw:
    return _Raw(f"[{', '.join(_digits(value) for value in values)}]")


def _inline_table(values: dict[str, float]) -> _Raw:
    return _inline({key: _digits(value) for key, value in values.items()})


def _inline(texts: Mapping[str, str]) -> _Raw:
    pairs = (f"{_key(key)} = {text}" for key, text in texts.items())
    return _Raw(f"{{ {', '.join(pairs)} }}")


def _key(key: str) -> str:
    return tomli_w.dumps({key: 0}).removesuffix(" = 0\n")
