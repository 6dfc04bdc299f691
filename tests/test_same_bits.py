"""Equal bits of a campaign's tables: for any number of workers, and whatever instructions the libraries choose.

Each variant is a fresh process, since numba, numpy, OpenBLAS and glibc read their settings when they are loaded. The
gas is warm, has two sets, ionization, attachment and a third body; 20 cohorts suffice.
"""

import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest
from numpy._core import _multiarray_umath as numpy_core

RUN_FILE = """
title = "equal bits"
seed = 7
[gas]
temperature_K = 293.15
pressure_Pa = 150000
fractions = { "oxygen-lawton1978" = 0.95, "nitrogen-schmalzried2023" = 0.05 }
[field]
E_over_N_Td = [300]
[accuracy]
"mean_energy" = 0.05
"""
CAMPAIGN = """
import sys
from swarmgauge.campaign import load_run_file, run_campaign
outcome = run_campaign(load_run_file(sys.argv[1]), sys.argv[2], workers=int(sys.argv[3]))
assert outcome.asked == len(outcome.points) == 1 and not outcome.missed
"""
TABLES = ("coefficients.csv", "distributions.csv")
NUMPY_FEATURES = [f for f in numpy_core.__cpu_dispatch__ if numpy_core.__cpu_features__.get(f)]
LIBRARIES = {
    "numpy": {"NPY_DISABLE_CPU_FEATURES": " ".join(NUMPY_FEATURES)},
    "blas": {"OPENBLAS_CORETYPE": "Haswell", "OPENBLAS_NUM_THREADS": "1"},
    "old blas": {"OPENBLAS_CORETYPE": "Nehalem"},
    "libm": {"GLIBC_TUNABLES": "glibc.cpu.hwcaps=-AVX2,-AVX512F,-FMA,-FMA4,-AVX2_Usable,-AVX512F_Usable,-FMA_Usable"},
}
PROCESSORS = {
    "avx2": {"NUMBA_CPU_NAME": "haswell", "NUMBA_CPU_FEATURES": ""},
    "sse4": {"NUMBA_CPU_NAME": "nehalem", "NUMBA_CPU_FEATURES": ""},
    "generic": {"NUMBA_CPU_NAME": "generic", "NUMBA_CPU_FEATURES": ""},
}
DISTRIBUTIONS_OF_START = """
import hashlib, sys
from swarmgauge.gas import Mixture
from swarmgauge.swarm.field import Field
from swarmgauge.swarm.plan import first_plan, solved
argon, oxygen, mixture = Mixture({"argon-yamabe1983": 1.0}), Mixture({"oxygen-schmalzried2023": 1.0}, 293.15), Mixture(
    {"oxygen-lawton1978": 0.5, "nitrogen-schmalzried2023": 0.5}, 293.15, 150000)
for gas in (argon, oxygen, mixture):
    for field in (10.0, 30.0, 100.0, 300.0):
        plan = first_plan(gas, Field(field), 1, solved(gas, Field(field)))
        digest = hashlib.sha256(plan.start_edges_eV.tobytes() + plan.start_cumulated.tobytes())
        for table in plan.tables:
            digest.update(table.tobytes())
        print(plan.window_time.hex(), plan.lags, plan.electrons, digest.hexdigest())
"""


def run_python(code, *arguments, settings=()):
    """Run code in a fresh process with further environment variables; return what it prints."""
    environment = {k: v for k, v in os.environ.items() if not k.startswith(("NUMBA_", "NPY_", "OPENBLAS_", "GLIBC_"))}
    result = subprocess.run(
        [sys.executable, "-c", code, *map(str, arguments)],
        env=environment | dict(settings),
        capture_output=True,
        text=True,
    )
    assert result.returncode == 0, result.stderr[-3000:]
    return result.stdout


def tables_of(folder: Path, workers: int, settings=()) -> dict[str, bytes]:
    """The tables of a small campaign, computed in a fresh process."""
    run_file = folder / "bits.toml"
    run_file.write_text(RUN_FILE, encoding="utf-8")
    results = folder / f"results-{workers}"
    run_python(CAMPAIGN, run_file, results, workers, settings=settings)
    return {name: (results / name).read_bytes() for name in TABLES}


@pytest.fixture(scope="module")
def reference(tmp_path_factory):
    """Tables computed by one worker with the instructions that this processor offers."""
    return tables_of(tmp_path_factory.mktemp("reference"), workers=1)


def assert_equal(tables, reference):
    for name in TABLES:
        lines = zip(tables[name].splitlines(), reference[name].splitlines(), strict=True)
        different = [(ours, theirs) for ours, theirs in lines if ours != theirs]
        assert not different, f"{len(different)} lines of {name} differ, the first one:\n{different[0]}"


@pytest.mark.parametrize("workers", [2, 4])
def test_any_number_of_workers(workers, reference, tmp_path):
    assert_equal(tables_of(tmp_path, workers), reference)


def test_another_processor_and_other_libraries(reference, tmp_path):
    # All at once; which of them a difference comes from is told by the slow tests below.
    settings = PROCESSORS["avx2"] | LIBRARIES["numpy"] | LIBRARIES["old blas"] | LIBRARIES["libm"]
    tables = tables_of(tmp_path, 2, settings | {"NUMBA_CACHE_DIR": str(tmp_path / "cache")})
    assert_equal(tables, reference)


@pytest.mark.slow
@pytest.mark.parametrize("settings", PROCESSORS.values(), ids=PROCESSORS)
def test_other_processors(settings, reference, tmp_path):
    assert_equal(tables_of(tmp_path, 2, settings | {"NUMBA_CACHE_DIR": str(tmp_path / "cache")}), reference)


@pytest.mark.slow
@pytest.mark.parametrize("settings", LIBRARIES.values(), ids=LIBRARIES)
def test_other_libraries(settings, reference, tmp_path):
    assert_equal(tables_of(tmp_path, 2, settings), reference)


@pytest.mark.slow
@pytest.mark.parametrize("settings", LIBRARIES.values(), ids=LIBRARIES)
def test_start_of_a_swarm(settings):
    # What cohorts are given by linear algebra: windows, start distributions, tables.
    assert run_python(DISTRIBUTIONS_OF_START, settings=settings) == run_python(DISTRIBUTIONS_OF_START)


def test_settings_act():
    # A test of equal bits says nothing where the setting does nothing: numpy's pow and the BLAS must notice theirs.
    code = """
import hashlib
import numpy as np
x = np.linspace(0.1, 30.0, 1001)
a = np.sin(np.outer(x, x))
print(hashlib.sha256(({}).tobytes()).hexdigest())
"""
    power, product = code.format("x**1.7"), code.format("a @ a")
    if "X86_V4" in NUMPY_FEATURES or "AVX512_SKX" in NUMPY_FEATURES:  # below these numpy calls libm's pow anyway
        assert run_python(power, settings=LIBRARIES["numpy"]) != run_python(power)
    assert run_python(product, settings=LIBRARIES["old blas"]) != run_python(product)


def test_small_numbers_are_not_flushed_to_zero():
    # A library built with fast-math may switch this on for a whole process; threads take it over from their maker.
    code = """
from concurrent.futures import ThreadPoolExecutor
import numpy as np
import swarmgauge.campaign, swarmgauge.report, swarmgauge.swarm.schedule
swarmgauge.swarm.solve_two_term(swarmgauge.Mixture({"model-ramp": 1.0}), 10.0)
halved = lambda _: (np.full(8, np.finfo(float).tiny) / 2.0).tolist()
with ThreadPoolExecutor(4) as pool:
    print([halved(0), *pool.map(halved, range(8))] == [[2.0**-1023] * 8] * 9)
"""
    assert run_python(code).split() == ["True"]
    assert np.finfo(float).tiny / 2.0 > 0.0
