"""From columns and what is said about them to a set file: all of it, checked, or nothing."""

import re
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np

from ..errors import ColumnError, InputError, printable
from ..files import write_atomically
from ..gas import Gas
from ..setfile import gas_from_content, parse_toml, read_text
from ..writer import process_text, set_text
from .rectangle import Rectangle, read_rectangle
from .request import Question, Request
from .units import AREA_M2, ENERGY_EV, THREE_BODY_M5, converted

Ask = Callable[[Question, str], str]
"""Gives the answer to a question; the text says what was wrong with the one before, or nothing."""


@dataclass(frozen=True, eq=False)
class Imported:
    """What an import came to: the set as it is read back, the ids of the new processes, and their rows."""

    gas: Gas
    new: tuple[str, ...]
    rows: int


def import_file(
    file: str,
    request: Request,
    target: Path,
    *,
    lines: str | None = None,
    decimal_comma: bool = False,
    ask: Ask | None = None,
) -> Imported:
    """Read columns of a file, ask what they leave open, and write the set.

    lines : as "4-30", where the table is, None for all of the file. ask : None where there is nobody. Raises
    ColumnError or SetFileError, with nothing written.
    """
    text = read_text(Path(file), "a file with columns of numbers")
    try:
        rectangle = read_rectangle(text, _range(lines), decimal_comma)
    except ColumnError as error:
        raise ColumnError(f"{file}, {error}") from error
    complete(request, file, target, ask)
    gas, new = write_columns(rectangle, request, file, target)
    return Imported(gas, tuple(new), len(rectangle.values))


def _range(lines: str | None) -> tuple[int, int] | None:
    if lines is None:
        return None
    match = re.fullmatch(r"([0-9]{1,9})-([0-9]{1,9})", lines)
    if match is None or int(match[1]) > int(match[2]):
        raise ColumnError(f"--lines {printable(lines)} is not a range. Give first and last line, as 4-30.")
    return int(match[1]), int(match[2])


def complete(request: Request, file: str, target: Path, ask: Ask | None) -> None:
    """Ask what is open, one by one; or, with nobody to ask, raise ColumnError with all of it in one line."""
    trouble = ""
    while open_questions := list(request.questions(new=not target.exists())):
        if ask is None:
            asked = "; ".join(f"{question.text}? ({question.option})" for question in open_questions)
            raise ColumnError(f"{file}: nothing was written, as the columns leave open: {asked}")
        answer = ask(open_questions[0], trouble)
        try:
            request.answer(open_questions[0], answer)
            trouble = ""
        except ColumnError as error:
            trouble = str(error)


def write_columns(rectangle: Rectangle, request: Request, file: str, target: Path) -> tuple[Gas, list[str]]:
    """Add the columns as processes to a set file, or begin one; what the file held stays as it was.

    request : with no open questions. Returns the set as it is read back, and the ids of the new processes. Raises
    ColumnError or SetFileError, with nothing written, where columns, keys and set do not go together.
    """
    new = [_process(rectangle, request, number, file) for number in request.columns]
    place = f"{file} into {target}"
    if target.exists():
        before = read_text(target)
        content = parse_toml(before, target)
        if request.top:
            raise ColumnError(
                f"{target}: exists, so --set {', '.join(request.top)} would change it. Leave that out, or edit it."
            )
        content["process"] = [*content.get("process", []), *new]
        gas = gas_from_content(content, place)
        added = "\n".join(process_text(p) for p in gas.published if p.id in {process["id"] for process in new})
        text = f"{before.rstrip()}\n\n{added}"
    else:
        top = {"name": target.stem, "note": _note(request, file), **request.top}
        gas = gas_from_content({**top, "process": new}, place)
        text = set_text(gas)
    reread = gas_from_content(parse_toml(text, target), str(target))
    if reread.canonical() != gas.canonical():
        raise ColumnError(f"{target}: would not read back as it was meant. Add the process by hand.")
    _write(target, text)
    return reread, [process["id"] for process in new]


def _note(request: Request, file: str) -> str:
    """Where the numbers come from, in a sentence for the set file."""
    columns = ", ".join(
        f"{keys['id']} from column {number} in {keys['unit']}" for number, keys in request.columns.items()
    )
    energy = f"energy from column {request.energy['column']} in {request.energy['unit']}"
    return f"Imported from {Path(file).name}: {energy}; {columns}."


def _write(target: Path, text: str) -> None:
    try:
        write_atomically(target, text.encode())
    except OSError as error:
        raise ColumnError(f"{target}: cannot be written ({error.strerror}). Check the folder.") from error


def _process(rectangle: Rectangle, request: Request, number: int, file: str) -> dict[str, Any]:
    """A process as it would stand in a set file."""
    keys = dict(request.columns[number])
    unit = keys.pop("unit")
    try:
        energy = converted(_column(rectangle, request.energy["column"]), request.energy["unit"], ENERGY_EV)
        section = converted(_column(rectangle, number), unit, THREE_BODY_M5 if "third_body" in keys else AREA_M2)
    except InputError as error:
        raise ColumnError(f"{file}, column {number}: {error}") from error
    if number == request.energy["column"]:
        raise ColumnError(f"{file}, column {number}: is the energy. Give the column of the cross section.")
    if len(energy) > 1 and energy[0] > energy[-1]:  # from high to low: the order says nothing
        energy, section = energy[::-1], section[::-1]
    if keys["kind"] == "elastic":
        keys.setdefault("threshold_eV", 0.0)
    return {"label": keys["id"], **keys, "energy_eV": energy, "cross_section_m2": section}


def _column(rectangle: Rectangle, number: int) -> np.ndarray:
    if number > rectangle.columns:
        raise ColumnError(f"there is no column {number}: rows have {rectangle.columns} numbers. Count columns from 1.")
    return rectangle.values[:, number - 1]
