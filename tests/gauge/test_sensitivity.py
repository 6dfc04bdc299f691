"""The table of derivatives of a run file, its lines and its maps."""

import csv

import pytest

from swarmgauge.campaign import load_run_file
from swarmgauge.gas import InputError
from swarmgauge.gauge.sensitivity import run_sensitivity, sensitivity_json, sensitivity_lines
from swarmgauge.report import draw_sensitivity
from swarmgauge.swarm.two_term_sensitivity import two_term_sensitivities

RUN_FILE = """
[gas]
temperature_K = 0
fractions = [{ "model-ramp" = 1.0 }, { "argon-yamabe1983" = 0.5, "model-ramp" = 0.5 }]
[field]
E_over_N_Td = [10, 30]
[sensitivity]
"""


@pytest.fixture(scope="module")
def sensitivity(tmp_path_factory):
    folder = tmp_path_factory.mktemp("sensitivity")
    path = folder / "case.toml"
    path.write_text(RUN_FILE, encoding="utf-8")
    run_file = load_run_file(path)
    assert run_file.sensitivity
    return run_sensitivity(run_file, folder / "case", workers=2)


def test_every_derivative_stands_in_the_table(sensitivity):
    with open(sensitivity.folder / "sensitivity.csv", newline="", encoding="utf-8") as file:
        rows = list(csv.DictReader(file))
    assert {row["method"] for row in rows} == {"two_term"}
    point = sensitivity.points[1]
    mine = [row for row in rows if row["point"] == point.key[:8]]
    assert len(mine) == sum(len(values) for values in point.values.values())
    expected = two_term_sensitivities(point.conditions.mixture, 30.0)
    for row in mine:
        assert float(row["sensitivity"]) == pytest.approx(expected[row["process"]][row["quantity"]], abs=6e-5)
    assert [len(entry["processes"]) for entry in sensitivity_json(sensitivity)] == [2, 2, 5, 5]


def test_lines_name_the_strongest_processes_in_80_columns(sensitivity):
    lines = list(sensitivity_lines(sensitivity))
    assert max(map(len, lines)) <= 80
    assert len([line for line in lines if line.startswith("d ln")]) == 2
    name, value = sensitivity.points[0].strongest("drift_velocity_flux", 1)[0]
    assert f"{name.partition('/')[2]} {value:+.2f}" in lines[2]


def test_maps_of_every_mixture(sensitivity):
    paths = draw_sensitivity(sensitivity)
    assert [path.name for path in paths] == [
        "sensitivity-1.png",
        "sensitivity-1.svg",
        "sensitivity-2.png",
        "sensitivity-2.svg",
    ]
    assert all(path.stat().st_size > 5000 for path in paths)


def test_the_section_has_no_keys(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(RUN_FILE + "bands = 3\n", encoding="utf-8")
    with pytest.raises(InputError, match="bands: unknown key"):
        load_run_file(path)
