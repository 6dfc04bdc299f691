"""Campaigns around a stand-in for the swarm: what is kept, reused, written and told."""

import csv
import json

import numpy as np
import pytest

from campaign.stand_in import BATCH, WORK, StandInRun, stand_in_drive
from swarmgauge.campaign import ResultsError, campaign, load_run_file, open_results, run_campaign
from swarmgauge.campaign.store import ResultsFolder

# Pinned: other programs read these names.
COEFFICIENT_HEAD = (
    "point,mixture,temperature_K,pressure_Pa,E_over_N_Td,B_over_N_Hx,B_angle_deg,angular_frequency_over_N,"
    "quantity,value,standard_error,unit,samples,upper_bound,two_term,set_error,target,reached"
)
DISTRIBUTION_HEAD = "point,energy_low_eV,energy_high_eV,f0,f0_standard_error,f1,f1_standard_error"


@pytest.fixture
def campaign_of(stand_in, run_file, tmp_path):
    def run(text=None, **options):
        if text is not None:
            run_file.write_text(text, encoding="utf-8")
        return run_campaign(load_run_file(run_file), tmp_path / "results", workers=2, **options)

    return run


def point_files(outcome):
    return sorted((outcome.folder / "points").glob("*.point"))


def test_tables_have_the_pinned_columns(campaign_of):
    outcome = campaign_of()
    lines = (outcome.folder / "coefficients.csv").read_text(encoding="utf-8").splitlines()
    assert lines[0] == COEFFICIENT_HEAD
    first = dict(zip(COEFFICIENT_HEAD.split(","), next(csv.reader(lines[1:])), strict=True))
    assert first == {
        "point": next(iter(outcome.points))[:8],
        "mixture": "1 oxygen-lawton1978",
        "temperature_K": "293.0",
        "pressure_Pa": "101325.0",
        "E_over_N_Td": "30.0",
        "B_over_N_Hx": "0.0",
        "B_angle_deg": "90.0",
        "angular_frequency_over_N": "0.0",
        "quantity": "drift_velocity_flux",
        "value": "30000.0",
        "standard_error": repr(0.01 * 30000.0),
        "unit": "m/s",
        "samples": "80",
        "upper_bound": "",
        "two_term": "",
        "set_error": "",
        "target": "",
        "reached": "",
    }
    judged = next(row for row in csv.DictReader(lines) if row["quantity"] == "mean_energy")
    assert (judged["target"], judged["reached"], judged["two_term"]) == ("1 %", "yes", "1.5")
    lines = (outcome.folder / "distributions.csv").read_text(encoding="utf-8").splitlines()
    assert lines[0] == DISTRIBUTION_HEAD
    assert len(lines) == 1 + 3 * 2


def test_a_second_run_computes_nothing(campaign_of):
    first = campaign_of()
    before = {path.name: path.read_bytes() for path in point_files(first)}
    table = (first.folder / "coefficients.csv").read_bytes()
    WORK["cohorts"] = 0
    second = campaign_of()
    assert WORK["cohorts"] == 0
    assert (first.reused, second.reused) == (0, 3)
    assert repr(second) == f"Outcome({second.folder}: 3 of 3 points, 3 from before; done)"
    assert {path.name: path.read_bytes() for path in point_files(second)} == before
    assert (second.folder / "coefficients.csv").read_bytes() == table


def test_a_tighter_target_adds_cohorts(campaign_of, run_file):
    campaign_of()  # 1 %: 80 cohorts a point
    assert WORK["cohorts"] == 3 * 80
    campaign_of(run_file.read_text().replace("0.01", "0.005"))  # 0.5 %: 320
    assert WORK["cohorts"] == 3 * 320


def test_more_fields_reuse_those_that_are_there(campaign_of, run_file):
    campaign_of()
    outcome = campaign_of(run_file.read_text().replace("[30, 100, 300]", "[30, 50, 100, 300]"))
    assert (outcome.reused, len(outcome.points)) == (3, 4)
    assert WORK["cohorts"] == 4 * 80


def test_a_damaged_point_is_computed_anew(campaign_of):
    first = campaign_of()
    path = point_files(first)[0]
    path.write_bytes(b"something else")
    WORK["cohorts"] = 0
    second = campaign_of()
    assert WORK["cohorts"] == 80
    assert second.set_aside == (f"points/{path.name}: not a point file",)
    assert path.with_name(path.name + ".damaged").read_bytes() == b"something else"


def interrupted_drive(after):
    """Ctrl-C after a number of progress reports."""

    def drive(runs, executor, *, on_progress=None, **options):
        count = 0

        def progress(run):
            nonlocal count
            count += 1
            if count == after:
                raise KeyboardInterrupt

        stand_in_drive(runs, executor, on_progress=progress, **options)

    return drive


def test_an_interrupted_campaign_keeps_what_it_has(campaign_of, monkeypatch):
    monkeypatch.setattr(campaign, "drive", interrupted_drive(after=80 // BATCH + 2))
    outcome = campaign_of()
    assert outcome.interrupted
    assert [point.status for point in outcome.points.values()] == ["done", "interrupted"]
    assert outcome.asked == 3
    assert len(point_files(outcome)) == 2  # one finished, one under way
    energies = open_results(outcome.folder).select("mean_energy")  # what is there of both, marked as not reached
    assert energies["E_over_N_Td"].tolist() == [30.0, 100.0]
    assert energies["reached"].tolist() == ["yes", "no"]
    monkeypatch.setattr(campaign, "drive", stand_in_drive)
    assert len(campaign_of().points) == 3
    assert WORK["cohorts"] == 3 * 80


def test_provenance_tells_how_and_not_who(campaign_of, run_file, tmp_path):
    outcome = campaign_of()
    text = (outcome.folder / "provenance.json").read_text(encoding="utf-8")
    origin = json.loads(text)
    assert origin["parameters"]["seed"] == 1
    assert origin["parameters"]["accuracy"]["max_minutes_per_point"] == 5
    assert origin["parameters"]["accuracy"]["mean_energy"] == 0.01
    assert origin["parameters"]["gas"]["fractions"] == [{"oxygen-lawton1978": 1.0}]
    assert set(origin["versions"]) >= {"swarmgauge", "python", "numpy", "numba", "scipy"}
    assert [point["point"] for point in origin["points"]] == list(outcome.points)
    assert len(origin["sets"]["oxygen-lawton1978"]) == 64
    assert str(tmp_path) not in text


def test_default_targets_stand_in_the_provenance(campaign_of, run_file):
    outcome = campaign_of(run_file.read_text().replace('"mean_energy" = 0.01', ""))
    origin = json.loads((outcome.folder / "provenance.json").read_text(encoding="utf-8"))
    assert origin["parameters"]["accuracy"]["diffusion_*"] == 0.02


def test_a_set_given_by_path_is_named_without_it(campaign_of, run_file, tmp_path):
    from swarmgauge.gas import load_named, write_set

    (tmp_path / "secret-place").mkdir()
    write_set(load_named("argon-yamabe1983"), tmp_path / "secret-place" / "mine.toml")
    outcome = campaign_of(run_file.read_text().replace("oxygen-lawton1978", "secret-place/mine.toml"))
    for name in ("coefficients.csv", "provenance.json"):
        text = (outcome.folder / name).read_text(encoding="utf-8")
        assert "argon-yamabe1983" in text
        assert "secret-place" not in text


def test_results_are_opened_as_tables(campaign_of):
    results = open_results(campaign_of().folder)
    drift = results.select("drift_velocity_flux")
    assert drift["value"].tolist() == [3e4, 1e5, 3e5]
    assert drift["samples"].tolist() == [80, 80, 80]
    assert results.select("mean_energy", E_over_N_Td=100.0)["two_term"].tolist() == [5.0]
    assert np.isnan(drift["upper_bound"]).all()
    assert results.eedf(drift["point"][0])["f0"].tolist() == [0.8, 0.05]
    assert repr(results) == "Results(results: 3 points, 30 to 300 Td; 1 oxygen-lawton1978; 8 quantities)"
    with pytest.raises(KeyError, match="drift; there are drift_velocity_flux, "):
        results.select("drift")


@pytest.mark.parametrize("name", ["coefficients.csv", "distributions.csv"])
def test_an_edited_table_is_noticed(campaign_of, name):
    folder = campaign_of().folder
    path = folder / name
    path.write_bytes(path.read_bytes().replace(b"0", b"1", 1))
    with pytest.raises(ResultsError, match=f"{name}: not as the run wrote it"):
        open_results(folder)
    campaign_of()
    open_results(folder)


def test_no_results_folder(tmp_path):
    with pytest.raises(ResultsError, match=r"provenance\.json cannot be read \(No such file or directory\)"):
        open_results(tmp_path)
    (tmp_path / "provenance.json").write_text("[1]", encoding="utf-8")
    with pytest.raises(ResultsError, match=r"provenance\.json: damaged"):
        open_results(tmp_path)


def test_progress_is_told(campaign_of):
    told = []
    campaign_of(
        on_start=lambda points, before, workers, time_left: told.append((points, before)),
        on_progress=lambda run: told.append("step"),
        on_finished=lambda run: told.append(run.field.E_over_N_Td),
    )
    assert told[0] == (3, 0)
    assert [what for what in told[1:] if what != "step"] == [30, 100, 300]


def test_limits_of_the_run_file_reach_the_points(campaign_of, run_file, monkeypatch):
    seen = {}

    class Run(StandInRun):
        def __init__(self, *arguments, **options):
            super().__init__(*arguments, **options)
            seen.update(options)

    def drive(runs, executor, **options):
        seen.update(options)
        stand_in_drive(runs, executor, **options)

    monkeypatch.setattr(campaign, "PointRun", Run)
    monkeypatch.setattr(campaign, "drive", drive)
    campaign_of("seed = 9\n" + run_file.read_text() + "max_minutes_per_point = 2\nmax_minutes = 7\n")
    assert (seen["max_minutes"], seen["seed"], seen["accuracy"]) == (7, 9, {"mean_energy": 0.01})
    campaign_of(max_minutes=3)
    assert seen["max_minutes"] == 3
    with ResultsFolder(campaign_of().folder).lock():
        pass
