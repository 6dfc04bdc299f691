"""How a results folder came about: enough to run it again, and nothing about who ran it or where."""

import hashlib
import json
import math
import os
import platform
from collections.abc import Iterable
from importlib.metadata import version
from pathlib import Path
from typing import Any

import swarmgauge
from swarmgauge.gas import Gas, Mixture
from swarmgauge.swarm.point import Point
from swarmgauge.swarm.targets import DEFAULT_ACCURACY

from .composition import parts_of
from .findings import findings_of
from .laws import special_laws
from .results import checksum
from .runfile import RunFile

SCHEMA = 1
_PACKAGES = ("numpy", "numba", "llvmlite", "scipy", "pydantic")
# Settings of the libraries below that choose other instructions.
_FLAGS = (
    "NUMBA_CPU_NAME",
    "NUMBA_CPU_FEATURES",
    "NUMBA_DISABLE_JIT",
    "NUMBA_OPT",
    "NPY_DISABLE_CPU_FEATURES",
    "OPENBLAS_CORETYPE",
    "GLIBC_TUNABLES",
)


def provenance(
    run_file: RunFile, points: Iterable[tuple[str, Point]], files: dict[str, str], wall_seconds: float
) -> dict[str, Any]:
    """What provenance.json holds.

    points : (key, point). files : name to text of the tables, kept as checksums. wall_seconds : of this run alone; a
    point that an earlier run computed brings its own times.
    """
    points = list(points)
    return {
        "schema": SCHEMA,
        "versions": {
            "swarmgauge": swarmgauge.__version__,
            "python": platform.python_version(),
            **{package: version(package) for package in _PACKAGES},
        },
        "run_file": {"name": run_file.path.name, "sha256": checksum(run_file.text)},
        "parameters": _parameters(run_file),
        "sets": {gas.name: _set_hash(gas) for gas in run_file.gases},
        "mixtures": {mixture.describe(): _composition(mixture) for mixture in _mixtures(run_file)},
        "check": {gas.name: [finding.as_json() for finding in findings_of(gas)] for gas in run_file.gases},
        "laws": list(dict.fromkeys(line for mixture in _mixtures(run_file) for line in special_laws(mixture))),
        "computer": {"cpu": cpu_model(), "system": f"{platform.system()} {platform.machine()}"},
        "flags": {name: os.environ[name] for name in _FLAGS if name in os.environ},
        "wall_seconds": round(wall_seconds, 3),
        "cpu_seconds": round(sum(point.cpu_seconds for _, point in points), 3),
        "points": [_point(key, point) for key, point in points],
        "files": {name: checksum(text) for name, text in files.items()},
    }


def cpu_model() -> str:
    """The processor as the system names it."""
    try:
        lines = Path("/proc/cpuinfo").read_text(encoding="utf-8").splitlines()
    except OSError:
        lines = []
    named = [line.partition(":")[2].strip() for line in lines if line.startswith("model name")]
    return named[0] if named else platform.processor() or "unknown"


def _parameters(run_file: RunFile) -> dict[str, Any]:
    """All keys of the run file with defaults filled in, sets by their names instead of their paths."""
    parameters = dict(run_file.parameters)
    fractions = {repr(_fractions(mixture)): _fractions(mixture) for mixture in _mixtures(run_file)}
    parameters["gas"] = {**parameters["gas"], "fractions": list(fractions.values())}
    if parameters["measured"] and parameters["measured"]["files"]:
        parameters["measured"] = {"files": [Path(name).name for name in parameters["measured"]["files"]]}
    if not run_file.accuracy:
        parameters["accuracy"] = {**parameters["accuracy"], **DEFAULT_ACCURACY}
    return parameters


def _mixtures(run_file: RunFile) -> list[Mixture]:
    return list({id(point.mixture): point.mixture for point in run_file.points}.values())


def _fractions(mixture: Mixture) -> dict[str, float]:
    return {gas.name: float(fraction) for gas, fraction in zip(mixture.gases, mixture.fractions, strict=True)}


def _composition(mixture: Mixture) -> dict[str, Any]:
    """What a measurement must have in common with a mixture."""
    bodies = [process.third_body for gas in mixture.gases for process in mixture.acting(gas)]
    return {
        "parts": parts_of(mixture),
        "three_body": any(body is not None for body in bodies),
        "as_gas": mixture.vibrational_temperature_K is None and not mixture.level_fractions,
    }


def _rounded(value: float) -> float | None:
    """Four digits, and nothing for NaN, which JSON does not know."""
    return float(f"{value:.4g}") if math.isfinite(value) else None


def _set_hash(gas: Gas) -> str:
    return hashlib.sha256(json.dumps(gas.canonical(), sort_keys=True).encode()).hexdigest()


def _point(key: str, point: Point) -> dict[str, Any]:
    return {
        "point": key,
        "E_over_N_Td": point.conditions.field.E_over_N_Td,
        "status": point.status,
        "cohorts": point.cohorts,
        "wall_seconds": round(point.wall_seconds, 3),
        "cpu_seconds": round(point.cpu_seconds, 3),
        "relaxation": point.relaxation,
        "ancestors": _rounded(point.ancestors),
        "effective_size": _rounded(point.effective_size),
        "share_of_time_above_table_end": {name: float(f"{share:.3g}") for name, share in point.above_tables.items()},
        "warnings": list(point.warnings),
    }
