"""What is wrong with a run file, in lines that say place, what was found and what to do."""

from typing import Any

from pydantic import BaseModel, ValidationError

from swarmgauge.gas.errors import suggestion

from .runfile_model import (
    AccuracySection,
    FieldSection,
    GasSection,
    MeasuredSection,
    RunFileModel,
    SensitivitySection,
    Sweep,
)

_MODELS: dict[tuple, type[BaseModel]] = {
    (): RunFileModel,
    ("gas",): GasSection,
    ("field",): FieldSection,
    ("accuracy",): AccuracySection,
    ("measured",): MeasuredSection,
    ("sensitivity",): SensitivitySection,
    ("field", "E_over_N_Td"): Sweep,
}
_REMEDIES = {
    "float_type": "Give a number.",
    "int_type": "Give a whole number.",
    "string_type": "Give text in quotes.",
    "list_type": "Give a list.",
    "dict_type": 'Give a table such as { "<set>" = 1.0 }.',
    "model_type": "Give a section with its keys.",
    "finite_number": "Give a finite number.",
    "greater_than": "Give a number above {gt:g}.",
    "greater_than_equal": "Give a number of {ge:g} or more.",
    "less_than": "Give a number below {lt:g}.",
    "less_than_equal": "Give a number of {le:g} or less.",
    "too_short": "Give at least one entry.",
}
_LONGEST_SHOWN = 40


def explain(error: ValidationError, document: dict[str, Any]) -> list[str]:
    """One line per fault, unknown keys first; a key that is missing because it is misspelt is told once."""
    faults = sorted(error.errors(include_url=False), key=lambda fault: fault["type"] != "extra_forbidden")
    lines: list[str] = []
    for fault in faults:
        location = _without_tags(fault["loc"])
        place = describe_place(location, document)
        match fault["type"]:
            case "extra_forbidden":
                lines.append(f"{place}: {_unknown(location)}")
            case "missing":
                if not any(f"Did you mean {location[-1]}?" in line for line in lines):
                    lines.append(f"{place} is missing. {_how_to_add(location)}")
            case "value_error":
                lines.append(f"{place} = {shown(fault['input'])}: {fault['ctx']['error']}")
            case kind:
                remedy = _REMEDIES[kind] if kind in _REMEDIES else fault["msg"] + "."
                if "ctx" in fault and ":g}" in remedy:
                    remedy = remedy.format(**fault["ctx"])
                lines.append(f"{place} = {shown(fault['input'])}: {remedy}")
    return lines


def describe_place(location: tuple, document: dict[str, Any]) -> str:
    """Words for a place: ("gas", "temperature_K", 1) is `[gas] temperature_K, item 2`."""
    sections = [key for (key,) in (path for path in _MODELS if len(path) == 1)]
    words = f"[{location[0]}]" if location[0] in sections else str(location[0])
    found: Any = document.get(location[0])
    for depth, key in enumerate(location[1:], start=1):
        if isinstance(key, int):
            if not isinstance(found, list):  # a single value was taken as a list of one
                continue
            words += f", item {key + 1}"
            found = found[key]
        else:
            words += f" {key}" if depth == 1 else f", {key}"
            found = found.get(key) if isinstance(found, dict) else None
    return words


def shown(value: Any) -> str:
    """A value as the file might write it, cut where long."""
    text = f'"{value}"' if isinstance(value, str) else str(value).lower() if isinstance(value, bool) else str(value)
    text = " ".join(text.split())
    return text if len(text) <= _LONGEST_SHOWN else text[: _LONGEST_SHOWN - 3] + "..."


def known_keys(location: tuple) -> dict[str, Any]:
    """Keys of a section, as the file writes them, with an example value (None where there is none)."""
    fields = _MODELS[location].model_fields
    return {field.alias or name: (field.examples or [None])[0] for name, field in fields.items()}


def _without_tags(location: tuple) -> tuple:
    if location[:2] == ("field", "E_over_N_Td") and location[2:3] in (("values",), ("sweep",), ("measured",)):
        return location[:2] + location[3:]
    return location


def _unknown(location: tuple) -> str:
    known = known_keys(location[:-1])
    if not known:
        return "unknown key. The section has none. Remove it."
    return f"unknown key. Known keys: {', '.join(known)}.{suggestion(str(location[-1]), known)}"


def _how_to_add(location: tuple) -> str:
    if len(location) == 1:
        needed = [name for name, field in _MODELS[location].model_fields.items() if field.is_required()]
        return f"Add the section, with {' and '.join(needed)}."
    return f"Add it, for example {location[-1]} = {_as_toml(known_keys(location[:-1])[location[-1]])}."


def _as_toml(value: Any) -> str:
    if isinstance(value, dict):
        return "{ " + ", ".join(f'"{key}" = {item}' for key, item in value.items()) + " }"
    return str(value)
