"""Where the run files and measured data that come with the program stand."""

from functools import cache
from pathlib import Path


@cache
def runs_folder() -> Path:
    """The folder of shipped run files: in an installed copy inside the package, in a checkout runs/ at its top."""
    package = Path(__file__).resolve().parents[1]
    installed = package / "shipped" / "runs"
    return installed if installed.is_dir() else package.parents[1] / "runs"


def shipped_data() -> dict[str, Path]:
    """Name to path of every shipped file of measured data."""
    return {path.stem: path for path in sorted((runs_folder() / "measured").glob("*.csv"))}
