"""The elastic part of a total momentum transfer, on cases that can be done by hand."""

import numpy as np
import pytest
from scipy.integrate import quad

from swarmgauge.gas import Gas, PowerLaw, Process, ProcessError, Ramp, Table


def gas(*others, total=None, elastic_is="total_momentum_transfer"):
    total = total or Table([0.0, 10.0], [10e-20, 10e-20], "hold")
    elastic = Process("elastic", "elastic", 0.0, total)
    return Gas("toy", "X", 4.0, elastic_is, (elastic, *others))


def elastic(made, *energies):
    return made.process("elastic").cross_section(np.array(energies, dtype=float))


def loss(kind, threshold, energy, section, beyond="zero", **more):
    return Process(kind, kind, threshold, Table(energy, np.array(section) * 1e-20, beyond), **more)


def test_excitation_ionization_and_attachment_are_subtracted():
    made = gas(
        loss("excitation", 1.0, [1.0, 3.0], [0.0, 2.0], "hold"),
        loss("ionization", 4.0, [4.0, 6.0, 8.0], [0.0, 4.0, 0.0]),
        loss("attachment", 2.0, [2.0, 2.5, 3.0], [0.0, 1.0, 0.0]),
    )
    # By hand: at 2.5 eV 10 - 1.5 - 1; at 5 eV 10 - 2 - 2; at 6 eV 10 - 2 - 4.
    np.testing.assert_allclose(elastic(made, 0.5, 2.0, 2.5, 5.0, 6.0, 9.0), np.array([10, 9, 7.5, 6, 4, 8]) * 1e-20)
    assert made.clipped is None
    assert made.warnings == ()
    assert elastic(gas(elastic_is="momentum_transfer"), 5.0)[0] == 10e-20
    # The published total stays as it is.
    np.testing.assert_array_equal(made.published[0].cross_section(np.array([6.0])), [10e-20])


def test_between_points_the_difference_is_exact():
    rng = np.random.default_rng(5)
    total = Table(np.linspace(0.0, 20.0, 11), rng.uniform(20e-20, 30e-20, 11), "hold")
    others = [
        loss("excitation", 1.7, np.sort(rng.uniform(1.0, 19.0, 7)), rng.uniform(0.0, 5.0, 7)),
        loss("ionization", 3.0, np.sort(rng.uniform(3.0, 19.0, 7)), rng.uniform(0.0, 5.0, 7), "hold"),
        Process("ramp", "excitation", 2.0, Ramp(4.0, 1e-22)),
    ]
    made = gas(*others, total=total)
    energy = np.linspace(0.0, 20.0, 9973)
    expected = total.value(energy) - sum(other.cross_section(energy) for other in others)
    np.testing.assert_allclose(elastic(made, *energy), expected, rtol=1e-13)


def test_jumps_stay_sharp():
    made = gas(loss("excitation", 2.0, [1.0, 3.0], [4.0, 4.0]))
    before, after = np.nextafter(2.0, 0.0), np.nextafter(3.0, 9.0)
    np.testing.assert_allclose(elastic(made, before, 2.0, 3.0, after), np.array([10, 6, 6, 10]) * 1e-20)


def test_curves_are_followed_closely():
    made = gas(
        loss("ionization", 1.0, [1.0, 2.0], [0.0, 5.0], -0.9),
        Process("law", "excitation", 3.0, PowerLaw(2e-20, -0.5)),
        total=Table([0.0, 1000.0], [20e-20, 20e-20], "hold"),
    )
    energy = np.geomspace(3.0, 999.0, 3001)
    expected = 20e-20 - 5e-20 * (energy / 2.0) ** -0.9 - 2e-20 / np.sqrt(energy)
    np.testing.assert_allclose(elastic(made, *energy), expected, rtol=1e-5)


def test_what_falls_below_zero_is_clipped_and_reported():
    # A triangle of height 30 on 4..6..8 eV over a total of 10: excess 20 at 6 eV, zero at 4 + 2/3 and 8 - 2/3 eV,
    # area 1/2 x 8/3 x 20 = 80/3 (1e-20 eV m2).
    made = gas(loss("excitation", 4.0, [4.0, 6.0, 8.0], [0.0, 30.0, 0.0]))
    np.testing.assert_allclose(elastic(made, 4.0 + 1 / 3, 6.0, 8.0 - 1 / 3), np.array([5, 0, 5]) * 1e-20, atol=1e-33)
    assert (elastic(made, *np.linspace(0.0, 10.0, 1001)) >= 0.0).all()
    np.testing.assert_allclose(elastic(made, 4.0 + 2 / 3, 4.7, 8.0 - 2 / 3), 0.0, atol=1e-33)
    assert made.clipped.area_eV_m2 == pytest.approx(80e-20 / 3)
    assert made.clipped.share == pytest.approx(80 / 3 / 100)
    assert made.clipped.peak_m2 == pytest.approx(20e-20)
    assert made.clipped.at_eV == 6.0
    assert "clipped area 2.7e-19 eV m2" in made.warnings[0]
    excess = quad(lambda e: max(0.0, 30 - 15 * abs(e - 6) - 10), 4, 8, points=[14 / 3, 6, 22 / 3])[0]
    assert made.clipped.area_eV_m2 == pytest.approx(excess * 1e-20)


def test_parts_that_add_up_exactly_are_no_excess():
    made = gas(loss("excitation", 1.0, [1.0, 2.0, 9.0], [0.0, 10.0, 10.0], "hold"))
    assert made.clipped is None
    assert elastic(made, 5.0)[0] == 0.0


def test_passive_and_three_body_processes_are_not_subtracted():
    made = gas(
        loss("excitation", 1.0, [1.0, 2.0], [3.0, 3.0], passive=True),
        loss("attachment", 1.0, [1.0, 2.0], [3.0, 3.0], third_body="self"),
    )
    np.testing.assert_array_equal(elastic(made, 1.5), [10e-20])


def test_below_and_beyond_the_total():
    made = gas(
        loss("excitation", 0.5, [0.5, 1.0], [0.0, 4.0], "hold"), total=Table([2.0, 10.0], [10e-20, 10e-20], -1.0)
    )
    # Below its first point the total keeps its value; the excitation starts there already.
    np.testing.assert_allclose(elastic(made, 0.1, 0.75, 1.5), np.array([10, 8, 6]) * 1e-20)
    # After the last point what is left follows the rule of the total.
    np.testing.assert_allclose(elastic(made, 10.0, 20.0), np.array([6, 3]) * 1e-20)


def test_a_total_without_table_is_refused():
    with pytest.raises(
        ProcessError, match=r'needs a table for the elastic process. Give energy_eV .* "momentum_transfer"'
    ):
        gas(total=PowerLaw(1e-20, 0.0))


def test_integral_elastic_is_told():
    assert "momentum transfer is too large" in gas(elastic_is="integral").warnings[0]
