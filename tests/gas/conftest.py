"""A small set file as parsed content, to be changed by the tests."""

import copy

import pytest
import tomli_w

TABLE = {"energy_eV": [0.0, 1.0, 2.0, 4.0], "cross_section_m2": [1e-20, 2e-20, 2e-20, 1e-20], "beyond": {"power": -0.5}}
CONTENT = {
    "name": "toy",
    "formula": "X2",
    "molar_mass_g_per_mol": 28.0,
    "elastic_is": "momentum_transfer",
    "source": "invented",
    "rights": "none",
    "note": "for tests",
    "process": [
        {"id": "elastic", "kind": "elastic", "threshold_eV": 0.0, "label": "elastic", "source": "invented"} | TABLE,
        {
            "id": "v1",
            "kind": "excitation",
            "threshold_eV": 0.5,
            "label": "vibration",
            "source": "invented",
            "energy_eV": [0.5, 1.0, 3.0],
            "cross_section_m2": [0.0, 1e-21, 0.0],
            "beyond": "zero",
        },
        {
            "id": "ion",
            "kind": "ionization",
            "threshold_eV": 10.0,
            "label": "ionization",
            "source": "invented",
            "ramp": {"from_eV": 10.0, "slope_m2_per_eV": 1e-21},
        },
    ],
}


@pytest.fixture
def content():
    """The parsed content of a sound set file; free to be changed."""
    return copy.deepcopy(CONTENT)


@pytest.fixture
def written(tmp_path):
    """A function that writes content as toy.toml and gives the path."""

    def write(content):
        path = tmp_path / "toy.toml"
        path.write_text(tomli_w.dumps(content), encoding="utf-8")
        return path

    return write
