"""Figures of a results folder."""

import re
import xml.etree.ElementTree as ElementTree
from itertools import pairwise

import matplotlib as mpl
import pytest
from campaign.conftest import RUN_FILE
from campaign.stand_in import install
from matplotlib.colors import to_rgb
from matplotlib.image import imread

from swarmgauge.campaign import load_run_file, open_results, run_campaign
from swarmgauge.report import draw_figures
from swarmgauge.report.groups import groups_of
from swarmgauge.report.style import COLOURS

NAMES = ["coefficients.png", "coefficients.svg", "eedf.png", "eedf.svg"]


@pytest.fixture
def results_of(tmp_path, monkeypatch):
    install(monkeypatch)

    def run(text=RUN_FILE):
        path = tmp_path / "case.toml"
        path.write_text(text, encoding="utf-8")
        return run_campaign(load_run_file(path), tmp_path / "results", workers=1).folder

    return run


def text_of(path):
    """Words of an SVG: matplotlib draws them as shapes and names each in a comment."""
    return " ".join(re.findall(r"<!-- (.*?) -->", path.read_text(encoding="utf-8")))


def test_each_figure_is_a_picture_in_two_forms(results_of):
    folder = results_of()
    paths = draw_figures(folder)
    assert sorted(path.name for path in paths) == NAMES
    assert sorted(path.name for path in (folder / "figures").iterdir()) == NAMES
    for path in paths:
        if path.suffix == ".png":
            assert imread(path).std() > 0.05  # something is drawn
        else:
            assert ElementTree.parse(path).getroot().tag.endswith("svg")


def test_equal_results_give_equal_bytes_whatever_the_users_style(results_of):
    folder = results_of()
    first = [path.read_bytes() for path in draw_figures(folder)]
    with mpl.rc_context({"lines.linewidth": 5.0, "svg.hashsalt": "other", "font.size": 20}):
        second = [path.read_bytes() for path in draw_figures(folder)]
        assert mpl.rcParams["font.size"] == 20  # and the style is left as it was
    assert first == second


def test_axes_name_quantity_and_unit(results_of):
    draw_figures(results_of())
    words = text_of(results_of() / "figures" / "coefficients.svg")
    for label in ("(Td)", "drift velocity", "(m/s)", "(eV)", "flux", "bulk", "ionization", "attachment"):
        assert label in words
    assert "oxygen-lawton1978, 293 K, 101325 Pa" in words


def test_several_mixtures_are_told_apart(results_of):
    folder = results_of(RUN_FILE.replace("temperature_K = 293", "temperature_K = [293, 400]"))
    groups = groups_of(open_results(folder))
    assert [group.label for group in groups] == ["293 K", "400 K"]
    draw_figures(folder)
    assert "400 K" in text_of(folder / "figures" / "eedf.svg")


def test_too_many_mixtures_are_counted(results_of):
    folder = results_of(RUN_FILE.replace("temperature_K = 293", "temperature_K = [250, 293, 300, 350, 400, 450, 500]"))
    draw_figures(folder)
    words = text_of(folder / "figures" / "coefficients.svg")
    assert "7 gases or states; 2 of them not drawn" in words
    assert "450 K" not in words


def test_one_point_without_field_can_be_drawn(results_of):
    draw_figures(results_of(RUN_FILE.replace("[30, 100, 300]", "0")))


def test_colours_differ_in_grey():
    # Luma of ITU-R BT.601, as grey prints weigh colours.
    luma = [sum(weight * part for weight, part in zip((0.299, 0.587, 0.114), to_rgb(c), strict=True)) for c in COLOURS]
    assert luma == sorted(luma)
    assert min(b - a for a, b in pairwise(luma)) > 0.05
