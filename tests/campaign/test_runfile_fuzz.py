"""Run files with anything in them: a message or a campaign, never another exception."""

import copy

import tomli_w
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from swarmgauge.campaign import load_run_file
from swarmgauge.gas import InputError

GOOD = {
    "title": "a test",
    "seed": 1,
    "gas": {
        "temperature_K": 293.15,
        "pressure_Pa": 101325,
        "fractions": {"nitrogen-phelps1985": 0.8, "oxygen-lawton1978": 0.2},
        "leave_out": ["oxygen-lawton1978/attachment"],
        "vibrational_temperature_K": [1000],
        "level_fractions": {"oxygen-lawton1978/a1delta": 0.1},
    },
    "field": {
        "E_over_N_Td": {"from": 10, "to": 100, "per_decade": 2},
        "B_over_N_Hx": 0,
        "B_angle_deg": [90],
        "angular_frequency_over_N": 0,
        "B_T": 0,
        "frequency_Hz": [0.0],
    },
    "accuracy": {
        "mean_energy": 0.01,
        "rate:*": {"rel": 0.1, "abs": 1e-22},
        "max_minutes": 1,
        "max_minutes_per_point": 2,
    },
}
texts = st.text(st.characters(codec="utf-8", exclude_categories=["Cs"]), max_size=12)
scalars = st.one_of(
    st.floats(), st.integers(-(2**70), 2**70), st.booleans(), texts, st.dates(), st.sampled_from(["measured", "../x"])
)
values = st.recursive(
    scalars,
    lambda inner: st.one_of(st.lists(inner, max_size=3), st.dictionaries(texts, inner, max_size=3)),
    max_leaves=6,
)


def places(table, start=()):
    for key, value in table.items():
        yield (*start, key)
        if isinstance(value, dict):
            yield from places(value, (*start, key))


def told(path):
    """The message about a run file, or nothing where it is taken."""
    try:
        assert load_run_file(path).points
    except InputError as error:
        return str(error)
    return ""


@settings(max_examples=300, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    place=st.sampled_from(sorted(places(GOOD))), value=values, new_key=st.one_of(st.none(), texts), drop=st.booleans()
)
def test_anything_in_a_key_is_taken_or_told(tmp_path, place, value, new_key, drop):
    document = copy.deepcopy(GOOD)
    table = document
    for key in place[:-1]:
        table = table[key]
    if drop:
        del table[place[-1]]
    table[place[-1] if new_key is None else new_key] = value
    path = tmp_path / "case.toml"
    path.write_text(tomli_w.dumps(document), encoding="utf-8")
    message = told(path)
    assert all(line.startswith(f"{path}") for line in message.splitlines())
    assert len(message) < 5000


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(content=st.one_of(st.binary(max_size=200), texts.map(str.encode)))
def test_any_bytes_are_taken_or_told(tmp_path, content):
    path = tmp_path / "case.toml"
    path.write_bytes(content)
    assert told(path).startswith(f"{path}")  # an empty file lacks sections, too
