"""What pydantic found wrong in a file, in one clear line each: place, what was found, what to do."""

from collections.abc import Callable, Iterable
from typing import Any

from pydantic import BaseModel, ValidationError
from pydantic.fields import FieldInfo

from .errors import nearest, printable, suggestion

_LINES = 6
_ROWS_NAMED = 5
_EXPECTED = {
    "float_type": "a number",
    "int_type": "a whole number",
    "string_type": "text in quotes",
    "bool_type": "true or false",
    "list_type": "a list, [...]",
    "dict_type": "a table, { key = value }",
    "model_type": "a table, { key = value }",
}
Findings = dict[tuple, list[dict[str, Any]]]


def form_faults(
    error: ValidationError, content: dict[str, Any], place: Callable[[tuple], str], model: type[BaseModel]
) -> list[str]:
    """Lines without the file's name for the findings of a pydantic model about the `content` of a file.

    place : from a location (keys and numbers) to words such as "process v1"; model : the top model. Findings about
    the rows of one list make one line, so do all keys that are missing in one place, and a misspelt key.
    """
    grouped, missing = _grouped(error, content)
    _drop_missing_where_misspelt(grouped, missing)
    lines = [
        _at(place(path), f"{_counted_keys(keys)} missing. Add {_meanings(keys, path, model)}.")
        for path, keys in missing.items()
        if keys
    ]
    for path, findings in grouped.items():
        if path and isinstance(path[-1], int):
            lines.append(f"{place(path)} is {_shown(findings[0]['input'])}. Write {_expected(findings[0], None)}.")
        else:
            lines.append(_at(place(path[:-1]), _fault(path, findings, model)))
    return lines


def joined(lines: Iterable[str], prefix: str) -> str:
    """The lines with a prefix, the first few in full and the others counted."""
    lines = list(lines)
    shown = "\n".join(prefix + line for line in lines[:_LINES])
    more = len(lines) - _LINES
    return f"{shown}\n{prefix}and {more} more of such faults." if more > 0 else shown


def _at(where: str, fault: str) -> str:
    return f"{where}, {fault}" if where else fault


def _grouped(error: ValidationError, content: dict[str, Any]) -> tuple[Findings, dict[tuple, list[str]]]:
    """Findings by the location of what is wrong, rows of a list of numbers together; and keys missing by place."""
    grouped: Findings = {}
    missing: dict[tuple, list[str]] = {}
    for finding in error.errors(include_url=False):
        path = _path_in_content(finding["loc"], content)
        if finding["type"] == "missing":
            missing.setdefault(path[:-1], []).append(str(path[-1]))
            continue
        row = len(path) > 1 and isinstance(path[-1], int) and finding["type"] == "float_type"
        grouped.setdefault(path[:-1] if row else path, []).append({**finding, "row": path[-1] if row else None})
    return grouped, missing


def _drop_missing_where_misspelt(grouped: Findings, missing: dict[tuple, list[str]]) -> None:
    """A misspelt key is one fault, not two: forget the missing key that an unknown one comes near to."""
    for path, findings in grouped.items():
        keys = missing.get(path[:-1], [])
        if findings[0]["type"] == "extra_forbidden" and (near := nearest(str(path[-1]), keys)):
            keys.remove(near)


def _path_in_content(location: tuple, content: Any) -> tuple:
    """The location with only what exists in the content (and a last key), without pydantic's names of choices."""
    path: list[Any] = []
    here = content
    for step in location:
        if isinstance(here, dict) and (step in here or step not in ("word", "table")):
            path.append(step)
            here = here.get(step)
        elif isinstance(here, list) and isinstance(step, int) and step < len(here):
            path.append(step)
            here = here[step]
    return tuple(path)


def _fault(path: tuple, findings: list[dict[str, Any]], model: type[BaseModel]) -> str:
    first = findings[0]
    key = printable(str(path[-1])) if path else "the file"
    if first["type"] == "extra_forbidden":
        known = list(_fields(path[:-1], model))
        return f'key "{key}" is unknown.{suggestion(key, known)} Known keys: {", ".join(known)}.'
    field = _fields(path[:-1], model).get(path[-1]) if path else None
    expected = _expected(first, field)
    if first["row"] is not None:
        shown = "; ".join(f"row {finding['row'] + 1}: {_shown(finding['input'])}" for finding in findings[:_ROWS_NAMED])
        more = len(findings) - _ROWS_NAMED
        counted = f"; and {more} more {'row' if more == 1 else 'rows'}" if more > 0 else ""
        return f"{key}, {shown}{counted}: not {expected}. Write {expected} in every row."
    if first["type"] in ("too_short", "too_long"):
        return f"{key} has {len(first['input'])} entries. Give exactly 2."
    if first["type"] == "literal_error" and len(_choices(first)) == 1:
        return f"{key} = {_shown(first['input'])} is not available, only {expected}. Write that or remove the key."
    near = ""
    if first["type"] == "literal_error" and isinstance(first["input"], str):
        near = suggestion(first["input"], _choices(first))
    return f"{key} = {_shown(first['input'])} is not {expected}. Write {expected}.{near}"


def _shown(value: Any) -> str:
    """A found value as it would stand in TOML, cut where long."""
    if isinstance(value, str):
        return f'"{printable(value)}"'
    try:
        return printable(str(value).lower() if isinstance(value, bool) else repr(value))
    except ValueError:  # Python writes no whole number of more than some thousand digits
        return "a huge number"


def _choices(finding: dict[str, Any]) -> list[str]:
    return [word.strip("'") for word in finding["ctx"]["expected"].replace(" or ", ", ").split(", ")]


def _expected(finding: dict[str, Any], field: FieldInfo | None) -> str:
    """What would be right; a choice also names the tables among the examples of its field."""
    if finding["type"] != "literal_error":
        return _EXPECTED.get(finding["type"], f"right ({finding['msg'].lower()})")
    ways = [f'"{choice}"' for choice in _choices(finding)]
    for example in (field.examples if field is not None else None) or []:
        if isinstance(example, dict):
            ways.append(f"{{ {', '.join(f'{key} = {value}' for key, value in example.items())} }}")
    return " or ".join([", ".join(ways[:-1]), ways[-1]]) if len(ways) > 1 else ways[0]


def _fields(path: tuple, model: type[BaseModel]) -> dict[str, FieldInfo]:
    """The keys of the model at a path."""
    fields = dict(model.model_fields)
    for step in path:
        if isinstance(step, str):
            fields = _inner_fields(fields[step].annotation) if step in fields else {}
    return fields


def _inner_fields(annotation: Any) -> dict[str, FieldInfo]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return dict(annotation.model_fields)
    for part in getattr(annotation, "__args__", ()):
        if found := _inner_fields(part):
            return found
    return {}


def _counted_keys(keys: list[str]) -> str:
    quoted = ", ".join(f'"{key}"' for key in keys)
    return f"key {quoted} is" if len(keys) == 1 else f"keys {quoted} are"


def _meanings(keys: list[str], path: tuple, model: type[BaseModel]) -> str:
    """What belongs under missing keys: the meaning of one, or only that several are to be added."""
    if len(keys) > 1:
        return "them"
    field = _fields(path, model).get(keys[0])
    return f"it: {field.description}" if field is not None and field.description else "it"
