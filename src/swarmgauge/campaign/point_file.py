"""Bytes of a point file: one line with format, key and checksum, then the fields as a zip of arrays."""

import hashlib
import io
from collections.abc import Mapping
from typing import Any

import numpy as np

FORMAT = 1
_MARK = b"swarmgauge-point"


class PointFileError(ValueError):
    """A point file that is damaged or was written by something else."""


def pack(state: Mapping[str, Any], key: str) -> bytes:
    """Arrays, numbers and texts of a point as bytes that notice any change."""
    buffer = io.BytesIO()
    arrays: dict[str, Any] = {name: np.asarray(value) for name, value in state.items()}
    np.savez(buffer, **arrays)
    body = buffer.getvalue()
    return b" ".join((_MARK, str(FORMAT).encode(), key.encode(), _checksum(key, body))) + b"\n" + body


def unpack(content: bytes, key: str) -> dict[str, Any]:
    """The state that `pack` was given, scalars as Python numbers and texts.

    Raises PointFileError where the bytes are not those of a whole point file of this key.
    """
    head, _, body = content.partition(b"\n")
    words = head.split(b" ")
    if len(words) != 4 or words[0] != _MARK:
        raise PointFileError("not a point file")
    if words[1] != str(FORMAT).encode():
        raise PointFileError(f"written in another format than {FORMAT}")
    if words[2] != key.encode():
        raise PointFileError("belongs to another point")
    if words[3] != _checksum(key, body):
        raise PointFileError("damaged: its checksum is wrong")
    with np.load(io.BytesIO(body), allow_pickle=False) as fields:
        return {name: _plain(fields[name]) for name in fields.files}


def _checksum(key: str, body: bytes) -> bytes:
    return hashlib.sha256(key.encode() + body).hexdigest().encode()


def _plain(array: np.ndarray) -> Any:
    return array if array.ndim else array.item()
