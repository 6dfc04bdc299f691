"""The results folder: whole files, one run at a time, damage noticed."""

import subprocess
import sys

import numpy as np
import pytest

from swarmgauge.campaign import FolderError
from swarmgauge.campaign.point_file import PointFileError, pack, unpack
from swarmgauge.campaign.store import ResultsFolder

KEY = "0123456789abcdef0123456789abcdef"
STATE = {"sums": np.arange(6.0).reshape(2, 3), "counts": np.array([1, 2]), "cut": 0.25, "cohorts": 2, "note": "a b"}


def test_a_state_comes_back_as_it_was():
    state = unpack(pack(STATE, KEY), KEY)
    assert set(state) == set(STATE)
    assert state["sums"].dtype == np.float64
    assert np.array_equal(state["sums"], STATE["sums"])
    assert state["counts"].dtype == np.int64
    assert (type(state["cut"]), state["cut"]) == (float, 0.25)
    assert (type(state["cohorts"]), state["cohorts"]) == (int, 2)
    assert state["note"] == "a b"


def test_every_flipped_byte_is_noticed():
    content = bytearray(pack(STATE, KEY))
    for place in range(len(content)):
        content[place] ^= 0x10
        with pytest.raises(PointFileError):
            unpack(bytes(content), KEY)
        content[place] ^= 0x10
    assert unpack(bytes(content), KEY)["cohorts"] == 2


@pytest.mark.parametrize("length", [0, 1, 20, 100, 500])
def test_a_file_cut_short_is_noticed(length):
    with pytest.raises(PointFileError):
        unpack(pack(STATE, KEY)[:length], KEY)


def test_a_file_of_another_point_or_format_is_noticed():
    content = pack(STATE, KEY)
    with pytest.raises(PointFileError, match="belongs to another point"):
        unpack(content, KEY[::-1])
    with pytest.raises(PointFileError, match="another format than 1"):
        unpack(content.replace(b"swarmgauge-point 1 ", b"swarmgauge-point 2 ", 1), KEY)
    with pytest.raises(PointFileError, match="not a point file"):
        unpack(b"PK\x03\x04 something else\nmore", KEY)


def test_what_is_saved_is_loaded(tmp_path):
    store = ResultsFolder(tmp_path / "results")
    with store.lock():
        assert store.load(KEY) is None
        store.save(KEY, STATE)
        assert store.load(KEY)["cohorts"] == 2
    assert sorted(path.name for path in store.points.iterdir()) == [f"{KEY}.point"]


def test_a_damaged_file_is_set_aside_and_named(tmp_path):
    store = ResultsFolder(tmp_path)
    with store.lock():
        store.save(KEY, STATE)
        path = store.points / f"{KEY}.point"
        path.write_bytes(path.read_bytes()[:-1])
        assert store.load(KEY) is None
        assert not path.exists()
        assert path.with_name(f"{KEY}.point.damaged").exists()
    assert store.set_aside == [f"points/{KEY}.point: damaged: its checksum is wrong"]


def test_a_second_run_on_the_folder_is_told(tmp_path):
    first, second = (ResultsFolder(tmp_path / "results") for _ in range(2))
    told = pytest.raises(FolderError, match=r"results: another run is at work on this folder\.")
    with first.lock(), told, second.lock():
        pass
    with ResultsFolder(tmp_path / "results").lock():
        pass


def test_a_killed_run_leaves_no_lock(tmp_path):
    code = (
        "import os, signal, sys; from swarmgauge.campaign.store import ResultsFolder\n"
        "with ResultsFolder(sys.argv[1]).lock():\n"
        "    os.kill(os.getpid(), signal.SIGKILL)\n"
    )
    subprocess.run([sys.executable, "-c", code, str(tmp_path / "results")], check=False)
    left_over = tmp_path / "results" / "points" / ".x.point.partial"
    left_over.write_bytes(b"half")
    with ResultsFolder(tmp_path / "results").lock():
        assert not left_over.exists()


def test_a_folder_of_other_things_is_left_alone(tmp_path):
    (tmp_path / "letter.txt").write_text("dear", encoding="utf-8")
    with pytest.raises(FolderError, match="holds files and is no results folder"), ResultsFolder(tmp_path).lock():
        pass
    assert [path.name for path in tmp_path.iterdir()] == ["letter.txt"]
