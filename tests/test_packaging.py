"""The wheel: built from the checkout, it works in a fresh environment and an empty folder, without the checkout."""

import csv
import os
import shutil
import subprocess
import sys
import sysconfig
import zipfile
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
SMALL_RUN = """
[gas]
temperature_K = 0
fractions = { "model-ramp" = 1.0 }
[field]
E_over_N_Td = [12]
[accuracy]
"drift_velocity_*" = 0.01
"""


def run(*command, folder: Path) -> str:
    """Run a command away from the checkout; returns what it prints."""
    environment = {name: value for name, value in os.environ.items() if name != "PYTHONPATH"}
    result = subprocess.run(
        [str(part) for part in command], cwd=folder, env=environment, capture_output=True, text=True
    )
    assert result.returncode == 0, f"{result.stdout[-2000:]}\n{result.stderr[-3000:]}"
    return result.stdout


@pytest.fixture(scope="module")
def wheel(tmp_path_factory):
    """The wheel, built from a copy that holds what the repository holds."""
    folder = tmp_path_factory.mktemp("wheel")
    source = folder / "source"
    source.mkdir()
    for name in ("src", "gases", "runs"):
        shutil.copytree(ROOT / name, source / name, ignore=shutil.ignore_patterns("__pycache__", "*.egg-info"))
    for name in ("pyproject.toml", "README.md", "DEVELOPERS.md"):
        shutil.copy(ROOT / name, source / name)
    run(sys.executable, "-m", "pip", "wheel", "-q", "--no-deps", "-w", folder, source, folder=folder)
    (built,) = folder.glob("*.whl")
    return built


@pytest.fixture(scope="module")
def installed(wheel, tmp_path_factory):
    """The `swarmgauge` command of a fresh environment that has the wheel; only its dependencies are borrowed."""
    environment = tmp_path_factory.mktemp("environment")
    run(sys.executable, "-m", "venv", "--without-pip", environment, folder=environment)
    python = environment / "bin" / "python"
    run(sys.executable, "-m", "pip", "--python", python, "install", "-q", "--no-deps", wheel, folder=environment)
    packages = Path(
        run(python, "-c", "import sysconfig; print(sysconfig.get_path('purelib'))", folder=environment).strip()
    )
    # A plain line in a .pth file adds a folder to the path behind the wheel's own, and reads no .pth files there: an
    # editable install of the checkout among the borrowed packages stays out of sight.
    (packages / "borrowed.pth").write_text(sysconfig.get_path("purelib") + "\n", encoding="utf-8")
    return environment / "bin" / "swarmgauge"


def test_wheel_holds_sets_and_runs(wheel):
    names = set(zipfile.ZipFile(wheel).namelist())
    patterns = (("gases", "*.toml"), ("gases", "README.md"), ("runs", "*.toml"), ("runs/measured", "*.csv"))
    for folder, pattern in patterns:
        shipped = [f"swarmgauge/shipped/{folder}/{path.name}" for path in (ROOT / folder).glob(pattern)]
        assert shipped
        assert set(shipped) <= names
    top = {name.split("/")[0] for name in names}
    assert {name for name in top if not name.endswith(".dist-info")} == {"swarmgauge"}


def test_it_is_the_wheel_that_runs(installed, tmp_path):
    where = run(installed.parent / "python", "-c", "import swarmgauge; print(swarmgauge.__file__)", folder=tmp_path)
    assert Path(where.strip()).is_relative_to(installed.parents[1])


def test_sets_of_an_installed_copy(installed, tmp_path):
    printed = run(installed, "sets", folder=tmp_path)
    for path in (ROOT / "gases").glob("*.toml"):
        assert path.stem in printed
    assert list(tmp_path.iterdir()) == []


def test_points_of_a_shipped_run(installed, tmp_path):
    printed = run(installed, "run", "ozone-feed", "--dry-run", folder=tmp_path)
    assert "15 points" in printed
    assert list(tmp_path.iterdir()) == []


def test_a_run_in_an_empty_folder(installed, tmp_path):
    (tmp_path / "small.toml").write_text(SMALL_RUN, encoding="utf-8")
    run(installed, "run", "small.toml", folder=tmp_path)
    results = tmp_path / "small"
    for name in ("coefficients.csv", "distributions.csv", "provenance.json", "figures/coefficients.png"):
        assert (results / name).stat().st_size > 0
    with open(results / "coefficients.csv", encoding="utf-8", newline="") as file:
        values = {row["quantity"]: row for row in csv.DictReader(file)}
    # K. F. Ness and R. E. Robson, Phys. Rev. A 34, 2185 (1986), ramp model: 6.838e4 m/s to 0.4 % (from memory).
    drift = values["drift_velocity_flux"]
    assert abs(float(drift["value"]) - 6.838e4) < 3 * float(drift["standard_error"]) + 0.004 * 6.838e4
    assert float(drift["standard_error"]) < 0.01 * 6.838e4
