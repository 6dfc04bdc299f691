"""Writing files whole or not at all."""

import os
from pathlib import Path

PARTIAL = ".partial"


def write_atomically(path: Path, content: bytes) -> None:
    """Write a file so that at every moment the old one or the new one is there, whole, even when power fails."""
    partial = path.with_name(f".{path.name}{PARTIAL}")
    try:
        with open(partial, "wb") as handle:
            handle.write(content)
            handle.flush()
            os.fsync(handle.fileno())
        partial.replace(path)
    except BaseException:
        partial.unlink(missing_ok=True)
        raise
    folder = os.open(path.parent, os.O_RDONLY)
    try:
        os.fsync(folder)  # the new name itself
    finally:
        os.close(folder)
