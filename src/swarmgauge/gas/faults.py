"""What pydantic found wrong in a file, in one clear line each: place, what was found, what to do."""

from collections.abc import Callable, Iterable
from typing import Any

from pydantic import BaseModel, ValidationError

from .errors import suggestion

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
    "literal_error": "",
}


def form_faults(
    error: ValidationError, content: dict[str, Any], place: Callable[[tuple], str], model: type
) -> list[str]:
    """Lines without the file's name for the findings of a pydantic model about the `content` of a file.

    place : from the location of a key (without the key) to words such as "process v1"; model : the top model.
    Findings about rows of one list make one line.
    """
    grouped: dict[tuple, list[dict[str, Any]]] = {}
    for finding in error.errors(include_url=False):
        path = _path_in_content(finding["loc"], content)
        row = len(path) > 1 and isinstance(path[-1], int) and isinstance(path[-2], str) and path[-2] != "process"
        grouped.setdefault(path[:-1] if row else path, []).append({**finding, "path": path, "row": row})
    lines = []
    for path, findings in grouped.items():
        where = place(path[:-1]) if path else ""
        lines.append((f"{where}, " if where else "") + _fault(path, findings, model))
    return lines


def joined(lines: Iterable[str], prefix: str) -> str:
    """The lines with a prefix, the first few in full and the others counted."""
    lines = list(lines)
    shown = "\n".join(prefix + line for line in lines[:_LINES])
    more = len(lines) - _LINES
    return f"{shown}\n{prefix}and {more} more of such faults." if more > 0 else shown


def _path_in_content(location: tuple, content: Any) -> tuple:
    """The location with only what exists in the content (and a last key), without pydantic's names of choices."""
    path: list[Any] = []
    here = content
    for step in location:
        if isinstance(here, dict) and (isinstance(step, str) and (step in here or step not in ("word", "table"))):
            path.append(step)
            here = here.get(step)
        elif isinstance(here, list) and isinstance(step, int) and step < len(here):
            path.append(step)
            here = here[step]
    return tuple(path)


def _fault(path: tuple, findings: list[dict[str, Any]], model: type) -> str:
    first = findings[0]
    key = str(path[-1]) if path and isinstance(path[-1], str) else "the file" if not path else "entry"
    kind = first["type"]
    if kind == "missing":
        return f'key "{key}" is missing. Add it{_meaning(key, path, model)}.'
    if kind == "extra_forbidden":
        known = list(_fields(path[:-1], model))
        return f'key "{key}" is unknown.{suggestion(key, known)} Known keys: {", ".join(known)}.'
    if first["row"]:
        shown = "; ".join(f"row {f['path'][-1] + 1}: {_shown(f['input'])}" for f in findings[:_ROWS_NAMED])
        more = len(findings) - _ROWS_NAMED
        counted = f"; and {more} more {'row' if more == 1 else 'rows'}" if more > 0 else ""
        return f"{key}, {shown}{counted}: not {_expected(first)}. Write {_expected(first)} in every row."
    if kind in ("too_short", "too_long"):
        return f"{key} has {len(first['input'])} entries. Give exactly 2."
    near = (
        suggestion(first["input"], _choices(first))
        if kind == "literal_error" and isinstance(first["input"], str)
        else ""
    )
    return f"{key} = {_shown(first['input'])} is not {_expected(first)}. Write {_expected(first)}.{near}"


def _shown(value: Any) -> str:
    text = f'"{value}"' if isinstance(value, str) else str(value).lower() if isinstance(value, bool) else repr(value)
    return text if len(text) <= 40 else text[:37] + "..."


def _choices(finding: dict[str, Any]) -> list[str]:
    return [word.strip("'") for word in finding["ctx"]["expected"].replace(" or ", ", ").split(", ")]


def _expected(finding: dict[str, Any]) -> str:
    if finding["type"] == "literal_error":
        quoted = [f'"{choice}"' for choice in _choices(finding)]
        return " or ".join([", ".join(quoted[:-1]), quoted[-1]]) if len(quoted) > 1 else quoted[0]
    return _EXPECTED.get(finding["type"], f"right ({finding['msg'].lower()})")


def _fields(path: tuple, model: type) -> dict[str, Any]:
    """The keys of the model at a path."""
    fields = dict(model.model_fields) if issubclass(model, BaseModel) else {}
    for step in path:
        if isinstance(step, str):
            fields = _inner_fields(fields[step].annotation) if step in fields else {}
    return fields


def _inner_fields(annotation: Any) -> dict[str, Any]:
    if isinstance(annotation, type) and issubclass(annotation, BaseModel):
        return dict(annotation.model_fields)
    for part in getattr(annotation, "__args__", ()):
        if found := _inner_fields(part):
            return found
    return {}


def _meaning(key: str, path: tuple, model: type) -> str:
    field = _fields(path[:-1], model).get(key)
    return f": {field.description}" if field is not None and field.description else ""
