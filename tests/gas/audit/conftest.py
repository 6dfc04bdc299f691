"""A set in which nothing is found, and ways to plant a fault in it."""

from dataclasses import replace

import numpy as np
import pytest

from swarmgauge.gas import Table, load_named
from swarmgauge.gas.audit.audit import check_set


@pytest.fixture
def helium():
    """A complete set, free of findings."""
    gas = load_named("helium-crompton1970")
    assert check_set(gas) == ()
    return gas


@pytest.fixture
def plant():
    """A function that changes a process of a gas: plant(gas, "ionization", threshold_eV=20.0)."""

    def change(gas, process_id, **changes):
        published = [replace(p, **changes) if p.id == process_id else p for p in gas.published]
        return replace(gas, published=tuple(published))

    return change


@pytest.fixture
def add():
    """A function that adds a process like another one to a gas."""

    def another(gas, like, **changes):
        return replace(gas, published=(*gas.published, replace(gas.process(like), **changes)))

    return another


@pytest.fixture
def found():
    """A function that gives the (grade, topic, process) of all findings of a gas."""
    return lambda gas: {(one.grade, one.topic, one.process) for one in check_set(gas)}


@pytest.fixture
def table():
    """A function that makes a table from rows of (energy, cross section)."""

    def make(*rows, beyond="zero"):
        energy, section = np.array(rows).T
        return Table(energy, section, beyond)

    return make
