"""What the tests of campaigns share."""

import pytest

from campaign.stand_in import install

RUN_FILE = """
title = "a test"
[gas]
temperature_K = 293
pressure_Pa = 101325
fractions = { "oxygen-lawton1978" = 1.0 }
[field]
E_over_N_Td = [30, 100, 300]
[accuracy]
"mean_energy" = 0.01
"""


@pytest.fixture
def stand_in(monkeypatch):
    install(monkeypatch)


@pytest.fixture
def run_file(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(RUN_FILE, encoding="utf-8")
    return path
