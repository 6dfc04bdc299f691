"""The comparison as files, lines and JSON."""

import csv
import json

import pytest

from gauge.conftest import drifts
from swarmgauge.campaign import ResultsError
from swarmgauge.cli import main
from swarmgauge.gauge.comparing import compare_folder, comparison_json, comparison_lines

FIELDS = [12.0, 25.0, 47.0, 80.0, 110.0, 200.0]


def table(path):
    with open(path, encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def test_tables_of_the_folder(results_of):
    folder = results_of(*drifts(FIELDS), *drifts([5.0]), *drifts([100.0], gas="Ar"))
    comparison = compare_folder(folder)
    rows = table(folder / "comparison.csv")
    assert len(rows) == 2 * 7 + 1
    compared = [row for row in rows if not row["not_compared_because"]]
    assert len(compared) == 2 * 6
    for row in compared:
        error = sum(
            float(row[name]) ** 2
            for name in ("measured_standard_error", "computed_standard_error", "interpolation_error")
        )
        pull = (float(row["computed"]) - float(row["measured"])) / error**0.5
        assert float(row["pull"]) == pytest.approx(pull, abs=1e-3)
        assert row["source"] == "a test"
    assert all(row["pull"] == "" for row in rows if row["not_compared_because"])
    assert [row["decade_Td"] for row in table(folder / "verdicts.csv")][:3] == ["all", "10 to 100", "100 to 1000"]
    assert [row["place"] for row in table(folder / "ranking.csv")] == ["1", "2"]
    json.dumps(comparison_json(comparison), allow_nan=False)
    assert not list(folder.glob(".*partial"))


def test_lines_say_count_chi_squared_trend_and_verdict_in_80_columns(results_of):
    folder = results_of(*drifts(FIELDS, off=0.08), *drifts([5.0]), *drifts([100.0], gas="Ar"))
    lines = list(comparison_lines(compare_folder(folder)))
    assert max(map(len, lines)) <= 80
    assert lines[0] == "measured in N2, against 1 nitrogen-phelps1985 at 293 K:"
    assert lines[1].split() == ["quantity", "n", "chi2/n", "trend", "verdict"]
    words = lines[2].split()
    assert (words[0], words[1], words[3], words[4]) == ("drift_velocity_bulk", "6", "high", "disagrees")
    text = " ".join(" ".join(lines).split())
    assert "sets of N2, ranked by 6 data that all can meet: 1. 1 nitrogen-" in text
    assert "not compared: 1 of drift_velocity_bulk in N2, because the campaign has values of it from 10" in text
    assert "not compared: 1 of drift_velocity_bulk in Ar, because no mixture of the campaign is Ar" in text


def test_the_command_takes_other_data(results_of, tmp_path, capsys):
    folder = results_of(*drifts(FIELDS))
    other = tmp_path / "other.csv"
    other.write_text((tmp_path / "data.csv").read_text(encoding="utf-8").replace("a test", "another"), encoding="utf-8")
    assert main(["compare", str(folder), "--measured", str(other)]) == 0
    out, faults = capsys.readouterr()
    assert faults == ""
    assert out.splitlines()[-1] == str(folder)
    assert {row["source"] for row in table(folder / "comparison.csv")} == {"another"}
    assert (folder / "figures" / "comparison-N2.png").is_file()
    assert main(["compare", str(folder), "--json"]) == 0
    assert len(json.loads(capsys.readouterr().out)["comparison"]) == 2 * len(FIELDS)


def test_a_folder_without_data_is_refused_with_the_ways_out(results_of, capsys):
    folder = results_of(*drifts(FIELDS))
    (folder / "measured.csv").unlink()
    with pytest.raises(ResultsError, match="Add one to the run file and run again"):
        compare_folder(folder)
    assert main(["compare", str(folder)]) == 2
    assert "or name files with --measured" in capsys.readouterr().err
    assert not (folder / "comparison.csv").exists()


def test_run_compares_where_data_are_given(results_of, tmp_path, capsys):
    results_of(*drifts(FIELDS))
    assert main(["run", str(tmp_path / "case.toml"), "--out", str(tmp_path / "run"), "--workers", "1"]) == 0
    text = " ".join(capsys.readouterr().out.split())
    assert "drift_velocity_bulk 6" in text
    assert "comparison.csv, verdicts.csv, ranking.csv" in text
    assert (tmp_path / "run" / "comparison.csv").is_file()
