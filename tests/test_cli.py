"""The command line, called as a function."""

import json
import re
import subprocess
import sys
import tomllib
from pathlib import Path

import pytest
from campaign.conftest import RUN_FILE
from campaign.stand_in import WORK, install, stand_in_drive

import swarmgauge
from swarmgauge import report
from swarmgauge.campaign import campaign, locate
from swarmgauge.campaign.store import ResultsFolder
from swarmgauge.cli import build_parser, main
from swarmgauge.gas import load_named, load_set, set_text


@pytest.fixture
def case(tmp_path, monkeypatch):
    """A run file, in the current folder, for the stand-in; figures, which take seconds, are not drawn."""
    install(monkeypatch)
    monkeypatch.setattr(report, "draw_figures", lambda folder: [])
    monkeypatch.chdir(tmp_path)
    path = tmp_path / "case.toml"
    path.write_text(RUN_FILE, encoding="utf-8")
    return path


def unwrapped(text):
    return re.sub(r"\n    +(?=\S)", " ", text)


def test_help_names_every_command(capsys):
    with pytest.raises(SystemExit) as stop:
        main(["--help"])
    assert stop.value.code == 0
    text = capsys.readouterr().out
    for command in ("sets", "check", "import", "run", "compare"):
        assert f"    {command} " in text


def test_version(capsys):
    with pytest.raises(SystemExit):
        main(["--version"])
    assert capsys.readouterr().out == f"swarmgauge {swarmgauge.__version__}\n"


def test_help_loads_nothing_heavy():
    code = "import sys; from swarmgauge.cli import build_parser; build_parser(); print(' '.join(sys.modules))"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    assert not {"numpy", "numba", "scipy", "pydantic", "matplotlib", "tqdm"} & set(loaded)


def test_module_can_be_run():
    result = subprocess.run([sys.executable, "-m", "swarmgauge", "sets"], capture_output=True, text=True, check=True)
    assert "oxygen-lawton1978" in result.stdout


def test_sets_are_listed(capsys):
    assert main(["sets"]) == 0
    lines = capsys.readouterr().out.splitlines()
    (oxygen,) = [line.split() for line in lines if line.startswith("oxygen-schmalzried2023 ")]
    assert oxygen[1:3] == ["O2", "momentum_transfer"]
    assert oxygen[4:] == ["30", "to", "1000"]
    assert max(map(len, lines)) <= 80
    assert main(["sets", "--json"]) == 0
    names = [entry["name"] for entry in json.loads(capsys.readouterr().out)]
    assert names == [line.split()[0] for line in lines[1:]]


def test_check_of_sound_sets(capsys):
    assert main(["check", "helium-crompton1970", "argon-yamabe1983"]) == 0
    text, faults = capsys.readouterr()
    assert faults == ""
    assert text.startswith("helium-crompton1970: He, 4 processes; nothing to object\n\nargon-yamabe1983: ")


def test_check_finds_an_error(tmp_path, capsys):
    text = set_text(load_named("helium-crompton1970")).replace(
        "molar_mass_g_per_mol = 4.0", "molar_mass_g_per_mol = 8.0"
    )
    (tmp_path / "heavy.toml").write_text(text, encoding="utf-8")
    assert main(["check", str(tmp_path / "heavy.toml")]) == 3
    assert "error: molar mass" in capsys.readouterr().out
    assert main(["check", str(tmp_path / "heavy.toml"), "--json"]) == 3
    (entry,) = json.loads(capsys.readouterr().out)
    assert [finding["grade"] for finding in entry["findings"]] == ["error"]


def test_check_at_a_field_and_its_figure(tmp_path, capsys):
    assert main(["check", "model-hard-sphere", "--E-over-N-Td", "5", "--out", str(tmp_path / "figures")]) == 0
    text = capsys.readouterr().out
    assert "energies probed at 5 Td" in text
    assert sorted(path.name for path in (tmp_path / "figures").iterdir()) == [
        "model-hard-sphere.png",
        "model-hard-sphere.svg",
    ]


def test_check_of_what_is_no_set(capsys):
    assert main(["check", "heliun-crompton1970"]) == 2
    assert "Did you mean helium-crompton1970?" in capsys.readouterr().err


@pytest.fixture
def columns(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "a1delta.txt").write_text("eV, 1e-22 m2\n0.977 0\n1.5 0.58\n3 3.8\n7 9.11\n20 2\n", encoding="utf-8")
    return tmp_path / "mine.toml"


def test_import_of_columns(columns, capsys):
    words = "import a1delta.txt --to mine.toml --lines 2-6 --energy 1 unit=eV --column 2 id=a1delta kind=excitation"
    words += " threshold_eV=0.977 unit=1e-22m2 beyond=-1.4 source=beam --set formula=O2 molar_mass_g_per_mol=31.998"
    assert main([*words.split(), "elastic_is=momentum_transfer", "source=our beam", "rights=ours"]) == 0
    lines = capsys.readouterr().out.splitlines()
    assert lines[0] == "mine.toml: a1delta written, 5 rows"
    assert lines[1].startswith("check: ")
    assert main(["check", "mine.toml"]) == 0


def test_import_asks_at_a_terminal_only(columns, capsys, monkeypatch):
    words = ["import", "a1delta.txt", "--to", "mine.toml", "--lines", "2-6"]
    monkeypatch.setattr(sys.stdin, "isatty", lambda: False)
    assert main(words) == 2
    faults = capsys.readouterr().err
    assert faults.startswith("swarmgauge: a1delta.txt: nothing was written, as the columns leave open: ")
    assert faults.count("\n") == 1
    assert not columns.exists()
    said = "1 eV 2 a1delta excitation 1e-22m2 0.977 zero beam O2 31.998 total elastic momentum_transfer us us"
    answers = iter(said.split())
    monkeypatch.setattr(sys.stdin, "isatty", lambda: True)
    monkeypatch.setattr("builtins.input", lambda prompt: next(answers))
    assert main(words) == 0
    assert capsys.readouterr().err.count("elastic_is = ") == 2  # "total" and "elastic" are not enough
    assert load_set(columns).formula == "O2"


def test_import_that_is_left_unanswered(columns, capsys, monkeypatch):
    def nothing(prompt):
        raise EOFError

    monkeypatch.setattr(sys.stdin, "isatty", lambda: True)
    monkeypatch.setattr("builtins.input", nothing)
    assert main(["import", "a1delta.txt", "--to", "mine.toml", "--lines", "2-6"]) == 2
    assert "nothing was written" in capsys.readouterr().err
    assert not columns.exists()


def test_run_prints_targets_first_and_the_folder_first_and_last(case, capsys):
    assert main(["run", "case.toml"]) == 0
    text, faults = capsys.readouterr()
    assert faults == ""
    lines = text.splitlines()
    assert lines[0] == "case: standard errors asked for: mean_energy 1 %"
    assert "oxygen-lawton1978/attachment-3body: third bodies that act: 1 x oxygen-lawton1978" in unwrapped(text)
    assert re.search(r"check: oxygen-lawton1978 \d+ doubts, \d+ notes \(provenance.json; ", unwrapped(text))
    assert lines[-1] == "case"
    assert max(map(len, lines)) <= 80
    assert sorted(path.name for path in Path("case").iterdir() if not path.name.startswith(".")) == [
        "coefficients.csv",
        "distributions.csv",
        "points",
        "provenance.json",
    ]


def test_a_run_with_a_set_that_cannot_be_right(case, capsys):
    text = set_text(load_named("oxygen-lawton1978")).replace("threshold_eV = 12.06", "threshold_eV = 2.06")
    Path("wrong.toml").write_text(text, encoding="utf-8")
    case.write_text(RUN_FILE.replace("oxygen-lawton1978", "wrong.toml"), encoding="utf-8")
    assert main(["run", "case.toml"]) == 3
    text = unwrapped(capsys.readouterr().out)
    assert "! oxygen-lawton1978, ionization, 2.06 eV: threshold 2.06 eV, but O2 has 12.0697 eV" in text
    findings = json.loads(Path("case/provenance.json").read_text(encoding="utf-8"))["check"]["oxygen-lawton1978"]
    assert [one["topic"] for one in findings if one["grade"] == "error"] == ["ionization energy", "threshold"]


def test_default_targets_are_printed(case, capsys):
    case.write_text(RUN_FILE.partition("[accuracy]")[0], encoding="utf-8")
    main(["run", "case.toml"])
    assert unwrapped(capsys.readouterr().out).splitlines()[0] == (
        "case: standard errors asked for: drift_velocity_* 0.5 %, mean_energy 0.5 %, diffusion_* 2 %, "
        "net_frequency_over_N 3 % or 1e-23"
    )


def test_out_chooses_the_folder(case, capsys):
    assert main(["run", "case.toml", "--out", "deep/elsewhere"]) == 0
    assert capsys.readouterr().out.splitlines()[-1] == "deep/elsewhere"
    assert Path("deep/elsewhere/coefficients.csv").exists()
    assert not Path("case").exists()


def test_a_run_file_without_ending_does_not_become_its_own_folder(case, capsys):
    case.rename("plain")
    assert main(["run", "plain"]) == 0
    assert Path("plain-results/coefficients.csv").exists()


def test_dry_run_writes_nothing(case, capsys):
    assert main(["run", "case.toml", "--dry-run"]) == 0
    assert [line.split()[1:] for line in capsys.readouterr().out.splitlines()[-3:]] == [
        ["30", "Td", "to", "do"],
        ["100", "Td", "to", "do"],
        ["300", "Td", "to", "do"],
    ]
    assert [path.name for path in Path().iterdir()] == ["case.toml"]
    main(["run", "case.toml", "--quiet"])
    main(["run", "case.toml", "--dry-run", "--json"])
    assert [point["there"] for point in json.loads(capsys.readouterr().out)] == [True] * 3


def test_quiet_prints_nothing(case, capsys):
    assert main(["run", "case.toml", "--quiet"]) == 0
    assert capsys.readouterr() == ("", "")


def test_json_is_all_that_is_printed(case, capsys):
    assert main(["run", "case.toml", "--json"]) == 0
    text, faults = capsys.readouterr()
    assert faults == ""
    outcome = json.loads(text)
    assert outcome["folder"] == "case"
    assert [point["E_over_N_Td"] for point in outcome["points"]] == [30, 100, 300]
    assert outcome["points"][1]["estimates"]["mean_energy"] == {
        "value": 5.0,
        "standard_error": 0.05,
        "unit": "eV",
        "upper_bound": None,
    }


def test_a_damaged_point_is_told(case, capsys):
    main(["run", "case.toml", "--quiet"])
    path = next(Path("case/points").glob("*.point"))
    path.write_bytes(b"?")
    assert main(["run", "case.toml"]) == 0
    assert f"points/{path.name}: not a point file; set aside as *.damaged and computed anew" in unwrapped(
        capsys.readouterr().out
    )


def give_up(runs, executor, *, on_finished=None, **options):
    """Time is over before the targets are met."""
    for run in runs:
        run.advance()
        type(run).finished = True
        on_finished(run)


def test_a_missed_target_ends_with_3(case, capsys, monkeypatch):
    monkeypatch.setattr(campaign.PointRun, "finished", campaign.PointRun.finished)
    monkeypatch.setattr(campaign, "drive", give_up)
    assert main(["run", "case.toml"]) == 3
    text = unwrapped(capsys.readouterr().out)
    assert "! 30 Td: mean_energy has 2 times the error of 1 % asked for" in text


def test_an_interruption_ends_with_130_and_says_how_to_go_on(case, capsys, monkeypatch):
    def drive(runs, executor, **options):
        stand_in_drive(runs[:1], executor, **options)
        raise KeyboardInterrupt

    monkeypatch.setattr(campaign, "drive", drive)
    assert main(["run", "case.toml"]) == 130
    text = capsys.readouterr().out
    assert (
        "interrupted: 1 of 3 points are finished; what there is of the others is kept too. Give the same"
        in unwrapped(text)
    )
    assert text.splitlines()[-1] == "case"
    monkeypatch.setattr(campaign, "drive", stand_in_drive)
    assert main(["run", "case.toml"]) == 0
    assert "3 points, 1 of them from before" in unwrapped(capsys.readouterr().out)
    assert WORK["cohorts"] == 3 * 80


BAD = {
    "no file": (["run", "none.toml"], "none.toml: there is no such file and no shipped run of this name."),
    "misspelt name": (["run", "ozon-feed"], "Did you mean ozone-feed?"),
    "folder for file": (["run", "/"], "there is no such file"),
    "bad key": (
        ["run", "bad.toml"],
        "bad.toml, fields: unknown key. Known keys: title, seed, gas, field, accuracy, measured, sensitivity.",
    ),
}


@pytest.mark.parametrize("fault", BAD)
def test_bad_input_ends_with_2_in_one_line_and_writes_nothing(case, capsys, fault):
    Path("bad.toml").write_text(RUN_FILE.replace("[field]", "[fields]"), encoding="utf-8")
    arguments, message = BAD[fault]
    assert main(arguments) == 2
    out, line = capsys.readouterr()
    assert out == ""
    assert line.startswith("swarmgauge: ")
    assert message in line
    assert line.count("\n") == 1 + ("is missing" in line)
    assert sorted(path.name for path in Path().iterdir()) == ["bad.toml", "case.toml"]


@pytest.mark.parametrize("option", [["--workers", "0"], ["--workers", "x"], ["--max-minutes", "-1"], ["--speed"]])
def test_bad_options_end_with_2(case, capsys, option):
    with pytest.raises(SystemExit) as stop:
        main(["run", "case.toml", *option])
    assert stop.value.code == 2
    assert option[0] in capsys.readouterr().err


def test_a_busy_folder_ends_with_2(case, capsys):
    with ResultsFolder("case").lock():
        assert main(["run", "case.toml"]) == 2
    assert "case: another run is at work on this folder." in capsys.readouterr().err


def test_a_folder_that_cannot_be_made_ends_with_1(case, capsys):
    Path("file").write_text("", encoding="utf-8")
    assert main(["run", "case.toml", "--out", "file/results"]) == 1
    line = capsys.readouterr().err
    assert line.startswith("swarmgauge: file/results")
    assert "Not a directory" in line


def test_a_shipped_run_is_found_by_its_name(case, capsys, tmp_path, monkeypatch):
    shipped = tmp_path / "shipped"
    shipped.mkdir()
    (shipped / "known.toml").write_text(RUN_FILE, encoding="utf-8")
    monkeypatch.setattr(locate, "runs_folder", lambda: shipped)
    for given in ("known", "known.toml", "runs/known.toml"):
        assert locate.locate(given) == (shipped / "known.toml", Path("known"))
    assert locate.locate("case.toml") == (Path("case.toml"), Path("case"))
    installed = "shipped/known.toml"  # inside an installation: results go to the current folder
    assert locate.locate(installed) == (Path(installed), Path("known"))


@pytest.mark.parametrize("path", sorted(locate.runs_folder().glob("*.toml")), ids=lambda path: path.stem)
def test_shipped_runs_are_sound(path, capsys, monkeypatch, tmp_path):
    monkeypatch.chdir(tmp_path)
    assert tomllib.loads(path.read_text(encoding="utf-8"))["title"]
    assert main(["run", path.stem, "--dry-run"]) == 0
    assert capsys.readouterr().out.startswith(f"{path.stem}: ")
    assert list(tmp_path.iterdir()) == []


def test_every_command_has_its_function():
    for arguments in (["sets"], ["check", "x"], ["run", "x"], ["compare", "x"]):
        assert callable(build_parser().parse_args(arguments).run)
