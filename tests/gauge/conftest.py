"""Results folders of a swarm that is known in closed form, and data that lie off it by as much as a test says."""

import pytest
from campaign.stand_in import install

from swarmgauge.campaign import load_run_file, run_campaign
from swarmgauge.campaign.measured import COLUMNS

RUN = """
[gas]
temperature_K = [293, 400]
fractions = [{ "nitrogen-phelps1985" = 1.0 }, { "nitrogen-schmalzried2023" = 1.0 }]
[field]
E_over_N_Td = { from = 10, to = 1000, per_decade = 3 }
[accuracy]
mean_energy = 0.01
"""
ROW = {
    "quantity": "drift_velocity_bulk",
    "E_over_N_unit": "Td",
    "unit": "m/s",
    "uncertainty": 0.02,
    "uncertainty_is": "one_sigma",
    "relative": "yes",
    "gas": "N2",
    "temperature_K": 293,
    "pressure_Pa": "",
    "method": "TOF",
    "source": "a test",
}


def drift_bulk(field):
    """What the stand-in computes."""
    return 1.1e3 * field


@pytest.fixture
def results_of(tmp_path, monkeypatch):
    """A folder of results with data, each a change of ROW with a field and a value."""
    install(monkeypatch)

    def run(*rows, text=RUN):
        lines = [",".join(COLUMNS)]
        for row in rows:
            cells = {**ROW, **row}
            lines.append(",".join(f'"{cells[name]}"' for name in COLUMNS))
        (tmp_path / "data.csv").write_text("\n".join(lines) + "\n", encoding="utf-8")
        path = tmp_path / "case.toml"
        path.write_text(text + '[measured]\nfiles = ["data.csv"]\n', encoding="utf-8")
        return run_campaign(load_run_file(path), tmp_path / "results", workers=1).folder

    return run


def drifts(fields, off=0.0, **more):
    """Rows of drift velocities that the computed ones exceed by a relative `off` (a number, or one for each field)."""
    parts = off if isinstance(off, list) else [off] * len(fields)
    return [
        {"E_over_N": field, "value": drift_bulk(field) / (1.0 + part), **more}
        for field, part in zip(fields, parts, strict=True)
    ]
