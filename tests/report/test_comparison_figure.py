"""The figure of measured data."""

import re

from gauge.conftest import drifts, results_of  # noqa: F401
from matplotlib.image import imread

from swarmgauge.gauge.comparing import compare_folder
from swarmgauge.report import draw_comparison


def test_one_figure_a_gas_with_sets_and_sources_named(results_of):  # noqa: F811
    folder = results_of(*drifts([12.0, 30.0, 100.0]), *drifts([20.0], source="a second test"))
    old = folder / "figures" / "comparison-old.png"
    old.parent.mkdir()
    old.write_bytes(b"of other data")
    paths = draw_comparison(compare_folder(folder))
    assert sorted(path.name for path in paths) == ["comparison-N2.png", "comparison-N2.svg"]
    assert not old.exists()
    png, svg = sorted(paths)
    assert imread(png).std() > 0.05
    words = " ".join(re.findall(r"<!-- (.*?) -->", svg.read_text(encoding="utf-8")))
    for label in ("drift velocity, bulk (m/s)", "deviation (%)", "(Td)", "a second test", "nitrogen-phelps1985"):
        assert label in words


def test_nothing_compared_draws_nothing(results_of):  # noqa: F811
    assert draw_comparison(compare_folder(results_of(*drifts([5.0])))) == []


def test_equal_comparisons_give_equal_bytes(results_of):  # noqa: F811
    folder = results_of(*drifts([12.0, 30.0, 100.0]))
    first = [path.read_bytes() for path in draw_comparison(compare_folder(folder))]
    assert [path.read_bytes() for path in draw_comparison(compare_folder(folder))] == first
