"""The figure of a set."""

import matplotlib as mpl
import pytest
from matplotlib.image import imread

from swarmgauge.gauge.checking import check
from swarmgauge.report import draw_set
from swarmgauge.report.set_figure import _figure
from swarmgauge.report.style import RC


@pytest.fixture
def style():
    with mpl.rc_context():
        mpl.rcParams.update(RC)
        yield


def test_files(tmp_path):
    (checked,) = check(["helium-crompton1970"], 100.0)
    paths = draw_set(checked, tmp_path / "new")
    assert [path.name for path in paths] == ["helium-crompton1970.png", "helium-crompton1970.svg"]
    assert imread(paths[0]).std() > 0.05
    before = [path.read_bytes() for path in paths]
    draw_set(checked, tmp_path / "new")
    assert [path.read_bytes() for path in paths] == before


@pytest.mark.parametrize("name", ["oxygen-lawton1978", "nitrogen-schmalzried2023"])
def test_every_process_is_named(name, style):
    (checked,) = check([name])
    figure = _figure(checked)
    texts = [text for axes in figure.axes for text in axes.texts]
    labels = {text.get_text() for text in texts}
    crowded = " ".join(text.replace("\n", " ") for text in labels if text.startswith("no room"))
    for process in checked.gas.processes:
        assert process.id in labels or process.id in crowded
    assert len(labels) > 0.7 * len(checked.gas.processes)
    for axes in figure.axes:
        boxes = [text.get_window_extent() for text in axes.texts if not text.get_text().startswith("no room")]
        for place, box in enumerate(boxes):
            assert not any(box.overlaps(other) for other in boxes[:place])


def test_doubts_are_ringed(style):
    (checked,) = check(["carbon-monoxide-land1978"])
    doubts = [one for one in checked.findings if one.grade == "doubt"]
    rings = [line for axes in _figure(checked).axes for line in axes.lines if line.get_marker() == "o"]
    assert len(rings) == len(doubts) > 2


def test_models_without_tables(style):
    (checked,) = check(["model-constant-growth"])
    assert [axes.get_title("left") for axes in _figure(checked).axes] == ["elastic", "ionization", "attachment"]
