"""What all tests share."""

import os

import pytest


@pytest.fixture
def seed():
    """Seed of a test; SWARMGAUGE_SEED changes it, so that a loop over seeds finds rare failures."""
    return int(os.environ.get("SWARMGAUGE_SEED", "1"))
