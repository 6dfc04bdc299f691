"""Laws at and between points, thresholds, ends of tables, and processes that contradict themselves."""

import math
import pickle

import numpy as np
import pytest

from swarmgauge.gas import PowerLaw, Process, ProcessError, Ramp, Sharing, Table

ENERGY = np.array([1.0, 2.0, 5.0])
SECTION = np.array([2e-20, 4e-20, 1e-20])


def process(kind="excitation", threshold=1.0, law=None, **more):
    return Process("p", kind, threshold, law or Table(ENERGY, SECTION, "zero"), **more)


def test_a_table_is_exact_at_its_points_and_linear_between():
    table = Table(ENERGY, SECTION, "hold")
    np.testing.assert_array_equal(table.value(ENERGY), SECTION)
    np.testing.assert_allclose(table.value(np.array([1.5, 3.0])), [3e-20, 3e-20], rtol=1e-15)
    assert table.value(np.array([[1.5], [0.5]])).tolist() == [[pytest.approx(3e-20)], [0.0]]
    assert (table.start_eV, table.end_eV) == (1.0, 5.0)


@pytest.mark.parametrize(
    ("beyond", "expected"),
    [("zero", 0.0), ("hold", 1e-20), (-1.0, 0.5e-20), (-2.0, 0.25e-20), (0.5, 1e-20 * math.sqrt(2))],
)
def test_beyond_the_last_point(beyond, expected):
    table = Table(ENERGY, SECTION, beyond)
    assert float(table.value(np.array(10.0))) == pytest.approx(expected, rel=1e-14)
    assert float(table.value(np.array(5.0))) == 1e-20
    assert float(table.value(np.nextafter(5.0, 6.0))) == pytest.approx(0.0 if beyond == "zero" else 1e-20)


def test_table_keeps_its_own_frozen_copy():
    energy = ENERGY.copy()
    table = Table(energy, SECTION, "zero")
    energy[0] = 1.7
    assert table.energy_eV[0] == 1.0
    with pytest.raises(ValueError, match="read-only"):
        table.energy_eV[0] = 3.0


def test_formulas():
    energy = np.array([0.0, 0.25, 1.0, 16.0])
    np.testing.assert_allclose(PowerLaw(2e-20, 0.5).value(energy), [0, 1e-20, 2e-20, 8e-20])
    np.testing.assert_array_equal(PowerLaw(2e-20, -0.5).value(energy), [np.inf, 4e-20, 2e-20, 0.5e-20])
    np.testing.assert_array_equal(PowerLaw(2e-20, 0.0).value(energy), np.full(4, 2e-20))
    np.testing.assert_array_equal(PowerLaw(0.0, -0.5).value(energy), np.zeros(4))
    np.testing.assert_allclose(Ramp(1.0, 2e-20).value(energy), [0, 0, 0, 3e-19])
    assert PowerLaw(1.0, 0.0).end_eV == Ramp(0.0, 1.0).end_eV == math.inf


def test_excitation_and_ionization_are_zero_below_the_threshold():
    energy = np.array([1.0, np.nextafter(1.5, 0.0), 1.5, 2.0])
    for kind in ("excitation", "ionization"):
        np.testing.assert_allclose(process(kind, 1.5).cross_section(energy), [0.0, 0.0, 3e-20, 4e-20], rtol=1e-15)
        constant = process(kind, 1.5, PowerLaw(1e-20, 0.0)).cross_section(energy)
        np.testing.assert_array_equal(constant, [0.0, 0.0, 1e-20, 1e-20])
        # A table that starts later than the threshold is zero up to its first point.
        np.testing.assert_array_equal(process(kind, 0.5).cross_section(np.array([0.7, 1.0])), [0.0, 2e-20])


def test_the_onset_of_attachment_does_not_cut():
    assert process("attachment", 1.5).cross_section(np.array([1.25]))[0] == pytest.approx(2.5e-20)
    assert process("attachment", 1.5, PowerLaw(1e-20, 0.0)).cross_section(np.array([0.1]))[0] == 1e-20
    assert process("attachment", 0.0).cross_section(np.array([0.9]))[0] == 0.0


def test_elastic_keeps_its_first_value_below_the_table():
    np.testing.assert_array_equal(process("elastic", 0.0).cross_section(np.array([0.0, 0.5, 1.0])), np.full(3, 2e-20))


def test_breakpoints_and_end():
    np.testing.assert_array_equal(process(threshold=1.5).breakpoints_eV, [1.0, 1.5, 2.0, 5.0])
    np.testing.assert_array_equal(process(threshold=1.0).breakpoints_eV, ENERGY)
    np.testing.assert_array_equal(process(law=Ramp(3.0, 1e-20)).breakpoints_eV, [1.0, 3.0])
    np.testing.assert_array_equal(process(law=PowerLaw(1e-20, 1.0)).breakpoints_eV, [1.0])
    assert process().end_eV == 5.0


def test_canonical_form_tells_physics_apart_and_nothing_else():
    base = process("attachment", 0.0)
    assert process("attachment", 0.0, label="other words", source="elsewhere").canonical() == base.canonical()
    others = [
        process("attachment", 0.1),
        process("excitation", 0.0),
        process("attachment", 0.0, third_body={"O2": 1.0}),
        process("attachment", 0.0, passive=True),
        process("attachment", 0.0, Table(ENERGY, SECTION, "hold")),
        process("attachment", 0.0, Table(ENERGY, np.nextafter(SECTION, 1.0), "zero")),
        process("attachment", 0.0, PowerLaw(1e-20, 0.0)),
    ]
    for other in others:
        assert other.canonical() != base.canonical()
    assert process("ionization", sharing=Sharing("equal")).canonical() != process("ionization").canonical()


def test_a_process_survives_the_way_to_another_worker():
    sent = process("attachment", 0.0, third_body={"O2": 1.0})
    assert pickle.loads(pickle.dumps(sent)).canonical() == sent.canonical()


def test_repr():
    assert repr(process()) == "Process(p: excitation, 1 eV, 3 points)"


IMPOSSIBLE = [
    (lambda: Table(ENERGY, SECTION[:2], "zero"), "energy_eV has 3 numbers and cross_section_m2 has 2. Give one"),
    (lambda: Table([1.0], [1e-20], "zero"), "the table has 1 rows. Give at least two"),
    (lambda: Table([[1.0, 2.0]], [[1e-20, 1e-20]], "zero"), "give two plain lists"),
    (lambda: Table(ENERGY, SECTION, "extrapolate"), 'beyond = "extrapolate" is unknown. Use "zero"'),
    (lambda: Table(ENERGY, SECTION, math.nan), "beyond: power = nan is outside -20 to 20"),
    (lambda: Table([1.0, 2.0, 2.0], SECTION, "zero"), "row 3: energy 2 eV does not exceed the row before it"),
    (
        lambda: Table(ENERGY, [1e-20, -1e-20, math.nan], "zero"),
        "row 2: cross section -1e-20 m2; row 3: cross section nan",
    ),
    (lambda: Table([-1.0, 1.0, math.inf], SECTION, "zero"), "row 1: energy -1 eV; row 3: energy inf eV. Give finite"),
    (lambda: Table(np.ones(9), np.ones(9), "zero"), "row 6: energy 1 eV .*; and 3 more rows. Sort the table"),
    (lambda: PowerLaw(-1.0, 0.0), "power_law: at_1_eV_m2 = -1 is not possible"),
    (lambda: PowerLaw(1.0, math.inf), "power_law: exponent = inf is outside"),
    (lambda: Ramp(math.nan, 1.0), "ramp: from_eV = nan is not possible"),
    (lambda: Ramp(1.0, -1e-20), "ramp: slope_m2_per_eV = -1e-20 is not possible"),
    (lambda: Sharing("opal"), 'sharing "opal" is unknown. Use "uniform"'),
    (lambda: Sharing("fixed", 1.5), "sharing: fraction = 1.5 is outside 0 to 1"),
    (lambda: process("ionisation"), 'kind = "ionisation" is unknown. .* Did you mean ionization'),
    (lambda: process(threshold=-1.0), "threshold_eV = -1 is not possible"),
    (lambda: process(threshold=math.nan), "threshold_eV = nan is not possible"),
    (lambda: process(threshold=6.0), r"threshold_eV = 6 lies above the end of the table \(5 eV\). Correct"),
    (lambda: process("elastic", 1.0), "threshold_eV = 1 for an elastic process. Set it to 0"),
    (lambda: process(sharing=Sharing("equal")), "sharing is given for an excitation process. Remove it"),
    (lambda: process(third_body="self"), "third_body is given for an excitation process. Remove it"),
    (lambda: process("attachment", third_body="both"), "third_body = 'both' is unknown. Use"),
    (lambda: process("attachment", third_body={}), "third_body = {} is unknown. Use"),
    (lambda: process("attachment", third_body={"O2": -1}), "third_body: O2 = -1 is not possible"),
    (lambda: process("ionization", lower="v1"), "lower is given for an ionization process. Remove it"),
    (lambda: process(degeneracy_lower=1, degeneracy_upper=0), "degeneracy_upper = 0 is not possible"),
    (lambda: process(degeneracy_lower=1, degeneracy_upper=1e7), "degeneracy_upper = 1e.07 is not possible"),
    (lambda: process(degeneracy_upper=2), "degeneracy_upper is given alone. Give degeneracy_lower and"),
    (lambda: process("attachment", vibrational=True), "vibrational is given for an attachment process. Remove it"),
    (lambda: process(relative_uncertainty=math.inf), "relative_uncertainty = inf is not possible"),
    (lambda: process(scattering="forward"), "scattering = 'forward' is not an angular law. Use"),
    (lambda: Process("a/b", "elastic", 0.0, Ramp(0.0, 1.0)), "id = 'a/b' cannot be a name. Use letters"),
]


@pytest.mark.parametrize(("make", "message"), IMPOSSIBLE)
def test_impossible_processes_are_refused(make, message):
    with pytest.raises(ProcessError, match=message):
        make()
