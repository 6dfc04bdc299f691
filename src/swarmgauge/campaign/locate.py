"""Where a run file stands, and where its results go."""

from pathlib import Path

from swarmgauge.gas.errors import suggestion

from .runfile import RunFileError
from .shipped import runs_folder


def shipped_runs() -> dict[str, Path]:
    """Name to path of every shipped run file."""
    return {path.stem: path for path in sorted(runs_folder().glob("*.toml"))}


def locate(given: str) -> tuple[Path, Path]:
    """A run file and its default results folder.

    `ozone-feed` and `runs/ozone-feed.toml` find the shipped file where there is no file of that path. Results stand
    beside the run file, those of a shipped one in the current folder. Raises RunFileError where there is no such file.
    """
    path = Path(given)
    if path.is_file():
        shipped_with_package = path.resolve().parent == runs_folder() and "shipped" in runs_folder().parts
        return path, Path(path.stem) if shipped_with_package else _beside(path)
    known = shipped_runs()
    if path.stem in known and path.suffix in ("", ".toml") and str(path.parent) in (".", "runs"):
        return known[path.stem], Path(path.stem)
    raise RunFileError(
        f"{given}: there is no such file and no shipped run of this name.{suggestion(path.stem, known)} "
        f"Give the path of a run file; shipped runs: {', '.join(known) or 'none'}."
    )


def _beside(path: Path) -> Path:
    folder = path.with_name(path.stem)
    return folder if folder != path else path.with_name(path.name + "-results")
