"""Ctrl-C in a real process: what is finished stays, and the next run goes on from there."""

import os
import signal
import subprocess
import sys
import time

import pytest

from swarmgauge.campaign import open_results

RUN_FILE = """
[gas]
temperature_K = 0
fractions = {{ "model-ramp" = 1.0 }}
[field]
E_over_N_Td = {fields}
[accuracy]
mean_energy = 0.005

"""
DEADLINE = 120.0  # seconds; compilation alone can take 20


def start(path):
    command = [sys.executable, "-m", "swarmgauge", "run", str(path), "--workers", "2"]
    # A parent that runs in the background may ignore SIGINT, and children inherit that.
    listen = lambda: signal.signal(signal.SIGINT, signal.SIG_DFL)  # noqa: E731
    return subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True, preexec_fn=listen)


def wait_for_a_point(folder, process):
    limit = time.monotonic() + DEADLINE
    while not list(folder.glob("points/*.point")):
        if process.poll() is not None or time.monotonic() > limit:
            pytest.fail(f"no point was finished: {process.communicate()}")
        time.sleep(0.05)


def test_ctrl_c_keeps_what_is_finished(tmp_path):
    path, folder = tmp_path / "case.toml", tmp_path / "case"
    fields = [10, 12, *range(14, 60)]
    path.write_text(RUN_FILE.format(fields=fields), encoding="utf-8")
    process = start(path)
    wait_for_a_point(folder, process)
    os.kill(process.pid, signal.SIGINT)
    out, faults = process.communicate(timeout=DEADLINE)
    assert process.returncode == 130
    assert faults == ""
    assert "points are finished; what there is of the others is kept too. Give the same" in " ".join(out.split())
    energies = open_results(folder).select("mean_energy")
    finished = set(energies["E_over_N_Td"][energies["reached"] == "yes"].tolist())
    assert 0 < len(finished) < len(fields)

    path.write_text(RUN_FILE.format(fields=sorted(finished)), encoding="utf-8")
    process = start(path)
    out, faults = process.communicate(timeout=DEADLINE)
    assert process.returncode == 0
    assert f"{len(finished)} points, {len(finished)} of them from before" in " ".join(out.split())
