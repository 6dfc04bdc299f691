"""The preview: two-term values of a whole sweep, marked as such, beside whatever a run has left."""

import csv
import json

import numpy as np
import pytest

from swarmgauge.campaign.results import ratio_to_two_term
from swarmgauge.campaign.store import FolderError, ResultsFolder
from swarmgauge.cli import main
from swarmgauge.gas import Mixture
from swarmgauge.swarm import solve_two_term

RUN_FILE = """
title = "preview"
[gas]
temperature_K = 0
fractions = { model-ramp = 1.0 }
[field]
E_over_N_Td = [1, 12, 24]
"""


@pytest.fixture
def case(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    path = tmp_path / "case.toml"
    path.write_text(RUN_FILE, encoding="utf-8")
    return path


def rows_of(path):
    with open(path, encoding="utf-8", newline="") as handle:
        return list(csv.DictReader(handle))


def test_every_value_of_every_point_is_written(case, capsys):
    assert main(["run", "case.toml", "--preview"]) == 0
    rows = rows_of(case.parent / "case" / "preview.csv")
    for field in (1.0, 12.0, 24.0):
        values = solve_two_term(Mixture({"model-ramp": 1.0}), field).values
        mine = {row["quantity"]: float(row["two_term"]) for row in rows if float(row["E_over_N_Td"]) == field}
        assert mine.keys() == values.keys()
        for name, value in values.items():
            assert mine[name] == pytest.approx(value, rel=1e-5)
    assert {row["unit"] for row in rows if row["quantity"] == "mean_energy"} == {"eV"}
    assert len({row["point"] for row in rows}) == 3


def test_the_table_says_what_it_is_and_fits(case, capsys):
    main(["run", "case.toml", "--preview"])
    lines = capsys.readouterr().out.splitlines()
    assert lines[0] == "two-term preview: no Monte Carlo, no statistical errors"
    assert max(map(len, lines)) <= 80
    (row,) = [line.split() for line in lines if line.strip().startswith("12 ")]
    drift = solve_two_term(Mixture({"model-ramp": 1.0}), 12.0).values["drift_velocity_flux"]
    assert float(row[2]) == pytest.approx(drift, rel=1e-3)
    assert "(" not in "".join(row)  # no errors are shown, since there are none
    assert lines[-1] == "case"


def test_finished_points_are_left_alone(case):
    with ResultsFolder("case").lock():
        (case.parent / "case" / "coefficients.csv").write_text("kept", encoding="utf-8")
    assert main(["run", "case.toml", "--preview", "--quiet"]) == 0
    assert (case.parent / "case" / "coefficients.csv").read_text(encoding="utf-8") == "kept"
    assert list((case.parent / "case" / "points").iterdir()) == []


def test_json_and_quiet(case, capsys):
    assert main(["run", "case.toml", "--preview", "--json"]) == 0
    found = json.loads(capsys.readouterr().out)
    assert found["method"] == "two-term"
    assert [point["E_over_N_Td"] for point in found["points"]] == [1, 12, 24]
    assert found["points"][0]["two_term"]["mean_energy"] > 0.0
    assert main(["run", "case.toml", "--preview", "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")


def test_a_folder_in_use_is_told(case, capsys):
    with ResultsFolder("case").lock():
        assert main(["run", "case.toml", "--preview"]) == 2
        with pytest.raises(FolderError), ResultsFolder("case").lock():
            pass
    assert "another run is at work on this folder" in capsys.readouterr().err


def test_a_field_that_runs_away_is_marked(case, capsys):
    case.write_text(RUN_FILE.replace("model-ramp = 1.0", '"argon-yamabe1983" = 1.0').replace("24", "50000"), "utf-8")
    assert main(["run", "case.toml", "--preview"]) == 0
    assert "~ 50000 Td: the solution has not converged" in capsys.readouterr().out


def test_ratios_need_a_value_and_a_two_term_value():
    rows = np.array(
        [(2.0, 0.1, np.nan, 4.0), (0.0, np.nan, 1e-3, 4.0), (1.0, 0.1, np.nan, 0.0), (-3.0, 0.3, np.nan, -2.0)],
        dtype=[(name, "f8") for name in ("value", "standard_error", "upper_bound", "two_term")],
    )
    ratio, error = ratio_to_two_term(rows)
    np.testing.assert_array_equal(ratio, [0.5, np.nan, np.nan, 1.5])
    np.testing.assert_allclose(error, [0.025, np.nan, np.nan, 0.15], rtol=1e-15)
