"""Rules for the source tree: one direction of imports, no hidden switches, a quick command line, a true README."""

import ast
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest

import swarmgauge

ROOT = Path(__file__).resolve().parents[1]
PACKAGE = ROOT / "src" / "swarmgauge"
PACKAGES = [
    "gas",
    "kernel",
    "swarm",
    "campaign",
    "gauge",
    "handoff",
    "report",
]  # each imports only from those before it
TOP = {"__init__", "__main__", "cli"}
SOURCES = sorted(PACKAGE.rglob("*.py"))
TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml", "src", "tests", "gases", "runs"}


def name_of(path: Path) -> str:
    return path.relative_to(PACKAGE).as_posix()


def package_of(path: Path) -> str:
    """The package that a source file belongs to, or the name of a module on top."""
    return path.relative_to(PACKAGE).with_suffix("").parts[0]


def imports_of(path: Path) -> list[str]:
    """Absolute names of all modules imported anywhere in a file, `from a import b` as a.b."""
    here = ["swarmgauge", *path.relative_to(PACKAGE).parent.parts]
    names = []
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names += [alias.name for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = here[: len(here) - node.level + 1] if node.level else []
            module = ".".join([*base, *([node.module] if node.module else [])])
            names += [f"{module}.{alias.name}" for alias in node.names]
    return names


def calls_of(path: Path) -> list[ast.Call]:
    return [node for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))) if isinstance(node, ast.Call)]


def sources(pattern: str = "**/*.py"):
    return pytest.mark.parametrize("path", sorted(PACKAGE.glob(pattern)), ids=name_of)


@sources()
def test_imports_go_one_way(path):
    package = package_of(path)
    if package in TOP:
        return
    allowed = set(PACKAGES[: PACKAGES.index(package) + 1])
    used = {name.split(".")[1] for name in imports_of(path) if name.startswith("swarmgauge.")}
    assert used - {"__version__"} <= allowed, f"{package} imports {sorted(used - allowed)}"


def test_every_package_is_known():
    assert {package_of(path) for path in SOURCES} <= {*PACKAGES, *TOP}


@sources("kernel/*.py")
def test_the_kernel_needs_nothing_but_numba(path):
    others = {name.split(".")[0] for name in imports_of(path)} - set(sys.stdlib_module_names)
    assert others <= {"numpy", "numba", "llvmlite", "swarmgauge"}
    of_ours = {name.split(".")[1] for name in imports_of(path) if name.startswith("swarmgauge.")}
    assert of_ours <= {"kernel"}


@sources()
def test_figures_are_drawn_in_report_only(path):
    if package_of(path) != "report":
        assert not [name for name in imports_of(path) if name.split(".")[0] in ("matplotlib", "mpl_toolkits")]


@sources()
def test_no_fast_math_and_no_parallel_loops(path):
    for call in calls_of(path):
        for keyword in call.keywords:
            assert keyword.arg not in ("fastmath", "parallel"), f"line {call.lineno}: {keyword.arg}"
    names = [node.id for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))) if isinstance(node, ast.Name)]
    assert "prange" not in names


@sources()
def test_no_switches_in_the_environment(path):
    # Only provenance may look: it notes the settings of libraries that choose instructions.
    if name_of(path) == "campaign/provenance.py":
        return
    text = path.read_text(encoding="utf-8")
    assert not re.search(r"\b(environ|getenv|putenv)\b", text)


@sources()
def test_no_random_numbers_but_our_own(path):
    assert not re.search(r"\bnp\.random\b|\bimport random\b|\bdefault_rng\b", path.read_text(encoding="utf-8"))


def test_top_level_holds_nothing_else():
    tracked = subprocess.run(["git", "ls-files"], cwd=ROOT, capture_output=True, text=True)
    if tracked.returncode != 0:
        pytest.skip("not a git checkout")
    top = {line.split("/")[0] for line in tracked.stdout.splitlines()}
    assert {name for name in top if not name.startswith(".")} == TOP_LEVEL


def test_one_version():
    project = tomllib.loads((ROOT / "pyproject.toml").read_text(encoding="utf-8"))["project"]
    assert project["version"] == swarmgauge.__version__


HEAVY = ("numpy", "numba", "scipy", "matplotlib", "pydantic", "llvmlite", "tqdm")


def test_public_names_can_be_completed():
    assert {"simulate", "Mixture", "critical_field"} <= set(dir(swarmgauge))


def test_help_loads_nothing_heavy():
    code = f"""
import sys
from swarmgauge.cli import main
try:
    main(["--help"])
except SystemExit as stop:
    assert stop.code == 0
print("LOADED", [name for name in {HEAVY!r} if name in sys.modules])
"""
    result = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert result.stdout.splitlines()[-1] == "LOADED []"


def readme_blocks(language: str) -> list[str]:
    return re.findall(rf"^```{language}\n(.*?)^```", (ROOT / "README.md").read_text(encoding="utf-8"), re.M | re.S)


@pytest.mark.parametrize("block", readme_blocks("python"))
def test_python_examples_of_the_readme(block, tmp_path):
    # later examples go on from the import of the first
    code = f"import swarmgauge as sg\n{block}"
    result = subprocess.run([sys.executable, "-c", code], cwd=tmp_path, capture_output=True, text=True)
    assert result.returncode == 0, result.stderr
    assert "eV" in result.stdout


@pytest.mark.parametrize("block", readme_blocks("toml"))
def test_run_files_of_the_readme(block, tmp_path):
    path = tmp_path / "example.toml"
    path.write_text(block, encoding="utf-8")
    code = "import sys; from swarmgauge.cli import main; sys.exit(main(['run', sys.argv[1], '--dry-run']))"
    result = subprocess.run([sys.executable, "-c", code, path], cwd=tmp_path, capture_output=True, text=True)
    assert result.returncode == 0, result.stderr
