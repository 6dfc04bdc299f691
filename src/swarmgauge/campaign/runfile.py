"""Read a run file: one campaign, checked whole before anything runs."""

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import product
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from swarmgauge.gas import Gas, InputError, Mixture, load_named_or_path
from swarmgauge.gas.errors import suggestion
from swarmgauge.gas.faults import joined
from swarmgauge.gas.setfile import parse_toml, read_text
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.targets import Target, parse_accuracy, refuse_unknown_processes

from .explain import explain
from .measured import Datum, fields_of_data, measured_data
from .runfile_model import SECTIONS_TO_COME, GasSection, RunFileModel
from .sweep import MOST_POINTS, fields_of

_LIMITS = ("max_minutes_per_point", "max_minutes")


class RunFileError(InputError):
    """A run file that cannot be used."""


@dataclass(frozen=True, eq=False)
class Conditions:
    """What one point is computed for."""

    mixture: Mixture
    field: Field


@dataclass(frozen=True, eq=False)
class RunFile:
    """A run file, read and checked.

    path : where it stands. title, seed : as given, or their defaults. points : in the order of output, fields fastest.
    accuracy : targets as given (empty: the defaults hold), for PointRun. targets : the same, parsed.
    parameters : all keys with defaults filled in. text : the file itself. measured : what the computed coefficients are
    compared with; None where nothing is. sensitivity : whether derivatives by the cross sections are wanted.
    """

    path: Path
    title: str
    seed: int
    points: tuple[Conditions, ...]
    accuracy: dict[str, Any]
    targets: tuple[Target, ...]
    max_minutes_per_point: float
    max_minutes: float | None
    parameters: dict[str, Any]
    text: str
    measured: tuple[Datum, ...] | None = None
    sensitivity: bool = False

    @property
    def name(self) -> str:
        """Name of the campaign: that of the file without its ending."""
        return self.path.stem

    @property
    def gases(self) -> list[Gas]:
        """The sets of all mixtures, each once."""
        return list({gas.name: gas for point in self.points for gas in point.mixture.gases}.values())

    def __repr__(self) -> str:
        return f"RunFile({self.name}: {self.title or 'no title'}; {len(self.points)} points, seed {self.seed})"


def load_run_file(path: str | Path) -> RunFile:
    """Read a run file, the sets it names and the points it asks for.

    Raises RunFileError, SetFileError or MixtureError, each with file, place, what was found and what to do.
    """
    path = Path(path)
    text = read_text(path)
    document = parse_toml(text, path)
    try:
        _refuse_what_is_to_come(document)
        model = _validate(document)
        targets = _parse_targets(model.accuracy.targets)
        measured = None if model.measured is None else tuple(measured_data(model.measured.files, path.parent))
        points = _points(model, path.parent, measured)
        _refuse_unknown_processes(targets, points)
    except InputError as error:
        raise RunFileError(joined(str(error).splitlines(), f"{path}, ")) from error
    parameters = model.model_dump(mode="json", by_alias=True)
    return RunFile(
        path=path,
        title=model.title,
        seed=model.seed,
        points=points,
        accuracy=model.accuracy.targets,
        targets=targets,
        max_minutes_per_point=model.accuracy.max_minutes_per_point,
        max_minutes=model.accuracy.max_minutes,
        parameters=parameters,
        text=text,
        measured=measured,
        sensitivity=model.sensitivity is not None,
    )


def _refuse_what_is_to_come(document: dict[str, Any]) -> None:
    for section in SECTIONS_TO_COME:
        if section in document:
            raise RunFileError(f"[{section}]: not available in this version of swarmgauge. Remove the section.")


def _validate(document: dict[str, Any]) -> RunFileModel:
    try:
        return RunFileModel.model_validate(document)
    except ValidationError as error:
        raise RunFileError("\n".join(explain(error, document))) from error


def _parse_targets(given: dict[str, Any]) -> tuple[Target, ...]:
    try:
        return parse_accuracy(given)
    except InputError as error:
        for key in given:
            if near := suggestion(key, _LIMITS):
                raise RunFileError(f"[accuracy] {key}: unknown key.{near}") from error
        raise RunFileError(f"[accuracy]: {error}") from error


def _refuse_unknown_processes(targets: tuple[Target, ...], points: Sequence[Conditions]) -> None:
    try:
        refuse_unknown_processes(targets, {id(point.mixture): point.mixture for point in points}.values())
    except InputError as error:
        raise RunFileError(f"[accuracy]: {error}") from error


def _points(model: RunFileModel, folder: Path, measured: Sequence[Datum] | None) -> tuple[Conditions, ...]:
    given = model.field.E_over_N_Td
    if isinstance(given, str):  # "measured", the only word
        return _points_as_measured(_mixtures(model.gas, folder), measured)
    try:
        fields = fields_of(given)
    except ValueError as error:
        raise RunFileError(f"[field] E_over_N_Td: {error}") from error
    if 0.0 in fields and 0.0 in model.gas.temperature_K:
        raise RunFileError("[field] E_over_N_Td = 0 at [gas] temperature_K = 0: electrons come to rest. Leave one out.")
    states = len(model.gas.temperature_K) * len(model.gas.pressures) * len(model.gas.vibrational_temperatures)
    count = len(model.gas.fractions) * states * len(fields)
    if count > MOST_POINTS:
        raise RunFileError(f"{count} points are asked for; at most {MOST_POINTS} are possible. Split the campaign.")
    swarms = [Field(E_over_N_Td=field) for field in fields]
    return tuple(Conditions(mixture, field) for mixture, field in product(_mixtures(model.gas, folder), swarms))


def _points_as_measured(mixtures: Sequence[Mixture], measured: Sequence[Datum] | None) -> tuple[Conditions, ...]:
    """Every mixture at the fields of the measurements in its gas."""
    if measured is None:
        raise RunFileError('[field] E_over_N_Td = "measured": there is no section [measured]. Add it, with files.')
    points = []
    for mixture in mixtures:
        fields = fields_of_data(measured, mixture)
        if not fields:
            gases = ", ".join(dict.fromkeys(str(datum.gas) for datum in measured))
            raise RunFileError(
                f'[field] E_over_N_Td = "measured": nothing was measured in {mixture.describe()}; '
                f"the files hold {gases}. Give a list of fields, or other files."
            )
        points += [Conditions(mixture, Field(E_over_N_Td=field)) for field in fields]
    return tuple(points)


def _mixtures(section: GasSection, folder: Path) -> list[Mixture]:
    """Every mixture at every temperature and pressure; each set is loaded once, each mixture kept once."""
    gases = {name: _load_gas(name, folder) for fractions in section.fractions for name in fractions}
    _check_sets_of("leave_out", section.leave_out, [gas.name for gas in gases.values()])
    _check_sets_of("level_fractions", list(section.level_fractions), [gas.name for gas in gases.values()])
    vibrating = {name for name, gas in gases.items() if any(p.is_level and p.vibrational for p in gas.processes)}
    mixtures: dict[str, Mixture] = {}
    for item, fractions in enumerate(section.fractions, start=1):
        names = {gases[name].name for name in fractions}
        absent = [process for process in section.leave_out if process.split("/")[0] in names]
        levels = {level: share for level, share in section.level_fractions.items() if level.split("/")[0] in names}
        parts = {gases[name]: fraction for name, fraction in fractions.items()}
        for temperature, pressure, vibrational in product(
            section.temperature_K, section.pressures, section.vibrational_temperatures
        ):
            try:
                mixture = Mixture(
                    parts,
                    temperature_K=temperature,
                    pressure_Pa=pressure,
                    leave_out=absent,
                    # A mixture without vibrations has nothing at that temperature; only where none has, it is refused.
                    vibrational_temperature_K=None if vibrating and vibrating.isdisjoint(fractions) else vibrational,
                    level_fractions=levels,
                )
            except InputError as error:
                where = f"[gas] fractions, item {item}" if len(section.fractions) > 1 else "[gas]"
                raise RunFileError(f"{where}: {error}") from error
            mixtures.setdefault(repr((mixture.describe(), temperature, pressure)), mixture)
    return list(mixtures.values())


def _load_gas(name: str, folder: Path) -> Gas:
    """A set by its name in gases/, or by the path of a file, taken from the folder of the run file."""
    try:
        return load_named_or_path(name, folder)
    except InputError as error:
        raise RunFileError(f"[gas] fractions: {error}") from error


def _check_sets_of(key: str, processes: Sequence[str], sets: Sequence[str]) -> None:
    for process in processes:
        if process.split("/")[0] not in sets:
            raise RunFileError(
                f'[gas] {key}: "{process}" names no set of this run ({", ".join(sets)}). Write "<set>/<process>".'
            )
