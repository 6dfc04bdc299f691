"""What a user says about the columns of a file, and which questions that leaves open."""

import tomllib
from collections.abc import Iterable, Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Any

from ..errors import ColumnError, printable, suggestion
from ..gas import ELASTIC_IS
from ..process import KINDS
from ..schema import ProcessEntry, SetEntry
from .units import AREA_M2, ENERGY_EV, THREE_BODY_M5, factor

# What a column can say: all keys of a process but its table, and the unit.
COLUMN_KEYS = (
    *(key for key in ProcessEntry.model_fields if key not in ("energy_eV", "cross_section_m2", "power_law", "ramp")),
    "unit",
)
SET_KEYS = tuple(key for key in SetEntry.model_fields if key not in ("name", "process"))
ENERGY_KEYS = ("unit",)
_SECTIONS = AREA_M2 | THREE_BODY_M5
_TEXTS = ("id", "kind", "label", "source", "unit", "lower", "formula", "elastic_is", "rights", "note")
_NUMBERS = ("threshold_eV", "molar_mass_g_per_mol")
_NEEDED = ("id", "kind", "unit", "threshold_eV", "beyond", "source")
_CHOICES = {"kind": KINDS, "elastic_is": ELASTIC_IS}


@dataclass(frozen=True)
class Question:
    """One thing that the columns do not say.

    option : how to answer on the command line. text : the question. place : where the answer goes in a Request: the
    number of a column, "energy" or "set", and the key there.
    """

    option: str
    text: str
    place: tuple[int | str, str]


@dataclass
class Request:
    """What is known about the columns, by key as in a set file.

    energy : {"column": number, "unit": ...}. columns : number to keys. top : keys of a new set.
    """

    energy: dict[str, Any] = field(default_factory=dict)
    columns: dict[int, dict[str, Any]] = field(default_factory=dict)
    top: dict[str, Any] = field(default_factory=dict)

    def answer(self, question: Question, text: str) -> None:
        """Take an answer; raises ColumnError where it cannot be one."""
        where, key = question.place
        if where == "energy":
            self.energy[key] = column_number(text) if key == "column" else parsed(key, text, ENERGY_EV)
        elif key == "columns":
            self.columns = {column_number(part): {} for part in text.replace(",", " ").split()}
        elif where == "set":
            self.top[key] = parsed(key, text)
        else:
            self.columns[int(where)][key] = parsed(key, text)

    def questions(self, new: bool) -> Iterator[Question]:
        """What is still open, in a good order to ask; new : whether the set is a new one."""
        yield from _energy_questions(self.energy)
        if not self.columns:
            option = " ".join(["--column 2", *(f"{key}=..." for key in _NEEDED)])
            yield Question(option, "which columns hold cross sections (numbers from 1)", ("set", "columns"))
        for number, known in self.columns.items():
            yield from _column_questions(number, known)
        if new:
            yield from _set_questions(self.top)


def _energy_questions(known: Mapping[str, Any]) -> Iterator[Question]:
    if "column" not in known:
        yield Question("--energy 1 unit=eV", "which column holds the energy", ("energy", "column"))
    if "unit" not in known:
        yield Question("--energy 1 unit=eV", f"in which unit is the energy ({_list(ENERGY_EV)})", ("energy", "unit"))


def _column_questions(number: int, known: Mapping[str, Any]) -> Iterator[Question]:
    needed = {
        "id": "what is the process to be called",
        "kind": f"what happens ({_list(KINDS)})",
        "unit": f"in which unit is it ({_list(THREE_BODY_M5 if 'third_body' in known else AREA_M2)})",
        "threshold_eV": "what energy does an electron lose, in eV (of attachment: from which energy on)",
        "beyond": "what follows the last row (zero, hold, or the power of energy by which it falls, as -0.9)",
        "source": "where is it from",
    }
    if known.get("kind") == "elastic":
        del needed["threshold_eV"]  # can only be 0
    for key, text in needed.items():
        if key not in known:
            yield Question(f"--column {number} {key}=...", f"column {number}: {text}", (number, key))


def _set_questions(known: Mapping[str, Any]) -> Iterator[Question]:
    needed = {
        "formula": "of which atom or molecule, as CO2",
        "molar_mass_g_per_mol": "what is its molar mass, g/mol",
        "elastic_is": f"what is an elastic cross section in this set ({_list(ELASTIC_IS)})",
        "source": "where is the set from",
        "rights": "who may use the numbers, and how",
    }
    for key, text in needed.items():
        if key not in known:
            yield Question(f"--set {key}=...", text, ("set", key))


def _list(words: Iterable[str]) -> str:
    return ", ".join(words)


def request_of(
    energy: Sequence[str], each: Sequence[str], columns: Sequence[Sequence[str]], top: Sequence[str]
) -> Request:
    """A request from the words of the command line; `each` holds for all columns that do not say otherwise.

    energy, and each of columns : the number of a column, then words key=value. Raises ColumnError.
    """
    request = Request(top=pairs(top, SET_KEYS, "--set"))
    if energy:
        request.energy = {"column": column_number(energy[0]), **pairs(energy[1:], ENERGY_KEYS, "--energy", ENERGY_EV)}
    for number, *words in columns:
        place = column_number(number)
        if place in request.columns:
            raise ColumnError(f"--column {place} is given twice. Give each column once.")
        own = pairs(words, COLUMN_KEYS, f"--column {place}")
        request.columns[place] = {**pairs(each, COLUMN_KEYS, "--each"), **own}
    return request


def pairs(
    words: Iterable[str], keys: tuple[str, ...], option: str, units: Mapping[str, float] = _SECTIONS
) -> dict[str, Any]:
    """Words of the form key=value as a dict; raises ColumnError for an unknown key or a word without a sign."""
    found: dict[str, Any] = {}
    for word in words:
        key, sign, value = word.partition("=")
        if not sign:
            raise ColumnError(f"{option}: {printable(word)} is not of the form key=value. Known keys: {_list(keys)}.")
        if key not in keys:
            raise ColumnError(
                f"{option}: key {printable(key)} is unknown.{suggestion(key, keys)} Known keys: {_list(keys)}."
            )
        if key in found:
            raise ColumnError(f"{option}: {key} is given twice. Give it once.")
        try:
            found[key] = parsed(key, value, units)
        except ColumnError as error:
            raise ColumnError(f"{option}: {error}") from error
    return found


def parsed(key: str, text: str, units: Mapping[str, float] = _SECTIONS) -> Any:
    """A value as it would stand in a set file, where words need no quotes; raises ColumnError where it cannot be one.

    units : those that a unit may be of.
    """
    if not text.strip():
        raise ColumnError(f"{key} has no value. Give one.")
    if key == "unit":
        factor(text, units)
    if key in _TEXTS:
        return _chosen(key, text.strip())
    try:
        value = tomllib.loads(f"value = {text}")["value"]
    except (tomllib.TOMLDecodeError, RecursionError):
        value = text.strip()
    number = isinstance(value, int | float) and not isinstance(value, bool)
    if key in _NUMBERS and not number:
        raise ColumnError(f"{key} = {printable(text)} is not a number. Give one.")
    return {"power": value} if key == "beyond" and number else value


def _chosen(key: str, text: str) -> str:
    known = _CHOICES.get(key)
    if known and text not in known:
        raise ColumnError(f"{key} = {printable(text)} is unknown.{suggestion(text, known)} Known: {_list(known)}.")
    return text


def column_number(text: str) -> int:
    """The number of a column, from 1; raises ColumnError."""
    if not text.strip().isdecimal() or int(text) < 1:
        raise ColumnError(f"{printable(text)} is not the number of a column. Count columns from 1.")
    return int(text)
