"""The results folder: files that are whole or not there, one file per point, one run at a time."""

import errno
import fcntl
from collections.abc import Iterator, Mapping
from contextlib import contextmanager
from pathlib import Path
from typing import Any

from swarmgauge.gas import InputError
from swarmgauge.gas.files import PARTIAL, write_atomically

from .point_file import PointFileError, pack, unpack

_LOCK = ".lock"


class FolderError(InputError):
    """A folder that cannot take results now."""


class ResultsFolder:
    """Where one campaign is kept.

    path : the folder; made on `lock`. set_aside : names of point files that were found damaged, in the order found.
    """

    def __init__(self, path: str | Path) -> None:
        self.path = Path(path)
        self.set_aside: list[str] = []

    @property
    def points(self) -> Path:
        """Folder of the point files."""
        return self.path / "points"

    @contextmanager
    def lock(self) -> Iterator[None]:
        """Make the folder and hold it; the system lets go when the process ends, however it ends.

        Raises FolderError where another run holds it or it is full of other things, OSError where it cannot be made.
        """
        self._refuse_other_things()
        self.points.mkdir(parents=True, exist_ok=True)
        with open(self.path / _LOCK, "wb") as handle:
            try:
                fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except OSError as error:
                if error.errno not in (errno.EAGAIN, errno.EACCES):
                    raise
                raise FolderError(
                    f"{self.path}: another run is at work on this folder. Wait for it, or choose another with --out."
                ) from error
            for folder in (self.path, self.points):
                for left_over in folder.glob(f".*{PARTIAL}"):  # from a run that was killed while writing
                    left_over.unlink()
            yield

    def has(self, key: str) -> bool:
        """Whether a file for this point is there, sound or not."""
        return self._file(key).exists()

    def load(self, key: str) -> dict[str, Any] | None:
        """The state kept for a point, or None. A file that is damaged or foreign is renamed and counts as absent."""
        path = self._file(key)
        try:
            return unpack(path.read_bytes(), key)
        except FileNotFoundError:
            return None
        except PointFileError as error:
            path.replace(path.with_name(path.name + ".damaged"))
            self.set_aside.append(f"points/{path.name}: {error}")
            return None

    def save(self, key: str, state: Mapping[str, Any]) -> None:
        """Keep the state of a point."""
        write_atomically(self._file(key), pack(state, key))

    def write(self, name: str, text: str) -> None:
        """Write a text file of the folder."""
        write_atomically(self.path / name, text.encode())

    def _refuse_other_things(self) -> None:
        if self.path.is_dir() and not self.points.is_dir() and any(self.path.iterdir()):
            raise FolderError(
                f"{self.path}: holds files and is no results folder. Choose a new or empty folder with --out."
            )

    def _file(self, key: str) -> Path:
        return self.points / f"{key}.point"
