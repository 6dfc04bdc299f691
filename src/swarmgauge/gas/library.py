"""The sets that come with the program, and finding a set by its name or path."""

import os
from functools import cache
from pathlib import Path

from .errors import SetFileError, suggestion
from .gas import Gas


@cache
def gases_folder() -> Path:
    """The folder of shipped sets: in an installed copy inside the package, in a checkout gases/ at its top."""
    package = Path(__file__).resolve().parents[1]
    installed = package / "shipped" / "gases"
    return installed if installed.is_dir() else package.parents[1] / "gases"


def shipped_sets() -> dict[str, Path]:
    """Name to path of every shipped set, by name."""
    return {path.stem: path for path in sorted(gases_folder().glob("*.toml"))}


def load_named(name: str) -> Gas:
    """A shipped set by its name; raises SetFileError."""
    path = _shipped_path(name)
    gas = _load(path)
    if gas.name != name:
        raise SetFileError(f'{path}, name = "{gas.name}" differs from the name of the file. Make them the same.')
    return gas


def load_named_or_path(given: str | os.PathLike[str], folder: str | os.PathLike[str] = ".") -> Gas:
    """A set by its name in gases/ or, with a slash or ending in .toml, by the path of its file.

    folder : where a relative path starts. Raises SetFileError.
    """
    text = os.fspath(given)
    if text.endswith(".toml") or "/" in text or os.sep in text:
        return _load(Path(folder) / Path(text))
    return load_named(text)


def _load(path: Path) -> Gas:
    from .setfile import load_set  # pydantic takes 0.1 s, so only when a file is read

    return load_set(path)


def _shipped_path(name: str) -> Path:
    known = shipped_sets()
    if name in known:
        return known[name]
    raise SetFileError(
        f'set "{name}" is unknown.{suggestion(name, known)} Known sets: {", ".join(known) or "none"}; '
        "or give the path of a set file, ending in .toml."
    )
