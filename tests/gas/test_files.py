"""Files are whole or not there."""

import os

import pytest

from swarmgauge.gas.files import write_atomically


def test_a_failed_write_keeps_the_old_file(tmp_path, monkeypatch):
    path = tmp_path / "kept"
    write_atomically(path, b"old")

    def full(descriptor):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "fsync", full)
    with pytest.raises(OSError, match="No space left"):
        write_atomically(path, b"new")
    assert path.read_bytes() == b"old"
    assert [path.name for path in tmp_path.iterdir()] == ["kept"]
