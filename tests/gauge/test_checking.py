"""The check of sets as text and for programs."""

import json

import pytest

from swarmgauge.gas import SetFileError, load_named, set_text
from swarmgauge.gauge.checking import check, checked_json, checked_lines


@pytest.fixture
def faulty(tmp_path):
    """A set file whose ionization lies below its excitations."""
    text = set_text(load_named("helium-crompton1970"))
    path = tmp_path / "faulty.toml"
    path.write_text(text.replace("threshold_eV = 24.587", "threshold_eV = 19.5"), encoding="utf-8")
    return str(path)


def test_a_sound_set():
    (one,) = check(["helium-crompton1970"])
    assert not one.wrong
    assert list(checked_lines([one])) == ["helium-crompton1970: He, 4 processes; nothing to object"]


def test_blocks_of_text(faulty):
    checked = check(["oxygen-lawton1978", faulty], 100.0)
    lines = list(checked_lines(checked))
    assert [one.wrong for one in checked] == [False, True]
    assert lines[0].startswith("oxygen-lawton1978: O2, 15 processes; ")
    assert max(len(line) for line in lines if faulty not in line) <= 80
    (head,) = [line for line in lines if line.startswith("helium-crompton1970")]
    assert lines[lines.index(head) - 1] == ""
    faults = lines[lines.index(head) :]
    assert "error: order of thresholds" in faults
    assert any(line.startswith("    -> ") for line in faults)
    assert any(line.startswith("energies probed at 100 Td") for line in faults)


def test_a_remedy_is_said_once_for_all_that_share_it():
    lines = list(checked_lines(check(["nitrogen-phelps1985"])))
    start = lines.index("note: threshold")
    late = [line for line in lines[start:] if line.startswith("    v")]
    assert len(late) == 6
    assert sum(line.startswith("    -> Right where a resonance") for line in lines) == 1


def test_for_programs(faulty):
    entries = json.loads(json.dumps(checked_json(check([faulty, "hydrogen-kim1994"], 100.0)), allow_nan=False))
    grades = {finding["grade"] for finding in entries[0]["findings"]}
    assert "error" in grades
    assert entries[0]["probe"]["E_over_N_Td"] == 100.0
    assert entries[0]["probe"]["processes"][0]["process"] == "elastic"
    assert entries[1]["probe"] is None
    assert "no elastic process" in entries[1]["no_swarm"]


def test_all_sets_are_read_before_one_is_checked(faulty):
    with pytest.raises(SetFileError, match="unknown"):
        check([faulty, "no-such-set"])
