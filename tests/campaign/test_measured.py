"""Files of measured data: what is read, and what is asked back."""

import csv
import io
import math

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from swarmgauge.campaign import RunFileError, load_run_file, open_results, run_campaign
from swarmgauge.campaign.composition import Composition, CompositionError, parts_of
from swarmgauge.campaign.measured import COLUMNS, MeasuredError, measured_csv, measured_data, read_measured
from swarmgauge.campaign.measured_quantities import MEASURABLE
from swarmgauge.campaign.shipped import shipped_data
from swarmgauge.gas import Mixture, load_named, shipped_sets

GOOD = {
    "quantity": "drift_velocity_bulk",
    "E_over_N": "10",
    "E_over_N_unit": "Td",
    "value": "1.85e6",
    "unit": "cm/s",
    "uncertainty": "0.1",
    "uncertainty_is": "one_sigma",
    "relative": "yes",
    "gas": "N2",
    "temperature_K": "293",
    "pressure_Pa": "",
    "method": "TOF",
    "source": "somebody, 1963",
}


def write(folder, *rows, columns=COLUMNS):
    path = folder / "data.csv"
    lines = [",".join(columns), *(",".join(f'"{row[name]}"' for name in columns) for row in rows)]
    path.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return path


def measured_row(row):
    text = io.StringIO(newline="")
    csv.writer(text).writerows([COLUMNS, [row[name] for name in COLUMNS]])
    return text.getvalue()


def read_one(folder, **changes):
    return read_measured(write(folder, {**GOOD, **changes}))[0]


def test_a_row_is_converted(tmp_path):
    datum = read_one(tmp_path)
    assert (datum.E_over_N_Td, datum.value, datum.unit) == (10.0, pytest.approx(1.85e4), "m/s")
    assert datum.standard_error == pytest.approx(1.85e3)
    assert (datum.temperature_K, datum.pressure_Pa, datum.place) == (293.0, None, "data.csv, line 2")


@pytest.mark.parametrize(("kind", "part"), [("one_sigma", 1.0), ("two_sigma", 2.0), ("limit", math.sqrt(3.0))])
def test_uncertainties_become_standard_errors(tmp_path, kind, part):
    # A range of half width a within which all values are alike has the standard deviation a / sqrt(3): Guide to the
    # Expression of Uncertainty in Measurement, JCGM 100:2008, 4.3.7.
    datum = read_one(tmp_path, uncertainty="6e4", relative="no", uncertainty_is=kind)
    assert datum.standard_error == pytest.approx(600.0 / part)


REFUSED = {
    "W": ({"quantity": "W"}, "column quantity", "flux or bulk? Bulk is what a drift tube times (drift_velocity_bulk)"),
    "bare drift velocity": ({"quantity": "drift_velocity"}, "column quantity", "a pulsed Townsend experiment must say"),
    "D_T/mu": ({"quantity": "D_T/mu", "unit": "eV"}, "column quantity", "characteristic_energy_T_flux"),
    "alpha": ({"quantity": "alpha/N"}, "column quantity", "townsend_alpha_over_N"),
    "misspelt": ({"quantity": "drift_velocity_bluk"}, "column quantity", "Did you mean drift_velocity_bulk?"),
    "flux from a tube": ({"quantity": "drift_velocity_flux"}, "column method", "a time-of-flight tube measures bulk"),
    "growth in space, by pulse": (
        {"quantity": "townsend_alpha_over_N", "unit": "m2", "method": "PT"},
        "column method",
        "net_frequency_over_drift_bulk_over_N",
    ),
    "pulse, by steady stream": ({"method": "SST"}, "column method", "townsend_*"),
    "no temperature": (
        {"E_over_N_unit": "V/(cm Torr)", "temperature_K": ""},
        "column E_over_N_unit",
        "Was the gas at room temperature, or the pressure reduced to 0 C?",
    ),
    "no unit": ({"unit": ""}, "column unit", "is empty. Give the unit"),
    "wrong unit": ({"unit": "eV"}, "column unit", "which is in m/s"),
    "no uncertainty": ({"uncertainty": ""}, "column uncertainty", "your own estimate, and say so"),
    "exact": ({"uncertainty": "0"}, "column uncertainty", "no measurement is exact"),
    "per cent": ({"uncertainty": "5"}, "column uncertainty", "If per cent was meant, divide by 100."),
    "unknown kind": ({"uncertainty_is": "sigma"}, "column uncertainty_is", "one_sigma, two_sigma, limit"),
    "neither yes nor no": ({"relative": "true"}, "column relative", "none of yes, no"),
    "negative": ({"value": "-5"}, "column value", "negative"),
    "not a number": ({"value": "1,5"}, "column value", "is not a number"),
    "infinite": ({"value": "inf"}, "column value", "is not a number"),
    "faster than light": ({"value": "4e10"}, "column value", "faster than light"),
    "field in another unit": ({"E_over_N_unit": "V m2"}, "column E_over_N", "2e+22 Td is no field of a swarm"),
    "negative field": ({"E_over_N": "-1"}, "column E_over_N", "negative"),
    "absolute zero": ({"temperature_K": "0"}, "column temperature_K", "impossible in an experiment"),
    "gas in words": ({"gas": "nitrogen gas"}, "column gas", "Give a formula such as N2"),
    "half a gas": ({"gas": "0.5 N2 + 0.4 O2"}, "column gas", "have the sum 0.9"),
    "no source": ({"source": ""}, "column source", "Give author, year"),
    "unknown method": ({"method": "drift tube"}, "column method", "none of TOF, PT, SST, other"),
}


@pytest.mark.parametrize("case", REFUSED)
def test_what_is_wrong_or_unclear_is_told_with_its_place(tmp_path, case):
    changes, place, words = REFUSED[case]
    with pytest.raises(MeasuredError) as refusal:
        read_measured(write(tmp_path, GOOD, {**GOOD, "E_over_N": "20", **changes}))
    message = str(refusal.value)
    assert message.startswith(f"{tmp_path / 'data.csv'}, line 3, {place}: ")
    assert words in message
    assert "\n" not in message


def test_faults_of_several_rows_are_told_at_once(tmp_path):
    with pytest.raises(MeasuredError) as refusal:
        read_measured(write(tmp_path, {**GOOD, "unit": "eV"}, GOOD, {**GOOD, "value": "x"}))
    lines = str(refusal.value).splitlines()
    assert [line.split(", ")[1] for line in lines] == ["line 2", "line 4"]


def test_what_pulsed_townsend_says_which_is_taken(tmp_path):
    for name in ("drift_velocity_flux", "drift_velocity_bulk"):
        assert read_one(tmp_path, quantity=name, method="PT").quantity == name


def test_the_same_row_twice_is_refused(tmp_path):
    with pytest.raises(MeasuredError, match=r"line 3, says the same as line 2\. Remove one of them\."):
        read_measured(write(tmp_path, GOOD, GOOD))


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "is empty. Its first line names the columns: quantity,"),
        ("quantity;E_over_N\n", "has one column only. Separate columns by commas"),
        (",".join(COLUMNS).replace("source", "sauce") + "\n", 'column "sauce": unknown. Did you mean source?'),
        (",".join(name for name in COLUMNS if name != "unit") + "\n", "column unit is missing"),
        (",".join([*COLUMNS, "unit"]) + "\n", "stands there twice"),
        (",".join(COLUMNS) + "\n", "holds no data"),
        (",".join(COLUMNS) + "\n1,2\n", "line 2: has 2 cells under 13 columns"),
        (",".join(COLUMNS) + '\n"a"b,2\n', "is not CSV"),
    ],
)
def test_a_file_that_is_no_table_is_refused(tmp_path, text, words):
    path = tmp_path / "data.csv"
    path.write_text(text, encoding="utf-8")
    with pytest.raises(MeasuredError) as refusal:
        read_measured(path)
    assert str(refusal.value).startswith(str(path))
    assert words in str(refusal.value)


@settings(max_examples=200, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
@given(
    column=st.sampled_from(COLUMNS),
    cell=st.one_of(
        st.text(max_size=12),
        st.text(alphabet="0123456789.-+eE^/() cmVTdorN2O", max_size=16),
        st.floats().map(str),
        st.integers(-(10**400), 10**400).map(str),
    ),
)
def test_whatever_stands_in_a_cell_is_read_or_refused(tmp_path, column, cell):
    path = tmp_path / "data.csv"
    path.write_text(measured_row({**GOOD, column: cell}), encoding="utf-8", errors="replace", newline="")
    try:
        (datum,) = read_measured(path)
    except MeasuredError:
        return
    assert math.isfinite(datum.value)
    assert math.isfinite(datum.E_over_N_Td)
    assert 0.0 < datum.standard_error < math.inf


def test_remarks_and_columns_that_may_be_absent(tmp_path):
    columns = [name for name in COLUMNS if name not in ("temperature_K", "pressure_Pa")]
    path = write(tmp_path, GOOD, columns=columns)
    path.write_text("# from the library\n" + path.read_text(encoding="utf-8"), encoding="utf-8")
    (datum,) = read_measured(path)
    assert datum.temperature_K is None
    assert datum.place == "data.csv, line 3"


def test_data_survive_being_written(tmp_path):
    data = measured_data(None, tmp_path)
    path = tmp_path / "again.csv"
    path.write_text(measured_csv(data), encoding="utf-8")
    for before, after in zip(data, read_measured(path), strict=True):
        assert after.standard_error == pytest.approx(before.standard_error, rel=1e-12)
        for name in ("quantity", "E_over_N_Td", "value", "unit", "gas", "temperature_K", "method", "source"):
            assert getattr(after, name) == getattr(before, name)


def test_gases_are_told_apart():
    nitrogen = Mixture({"nitrogen-phelps1985": 1.0, "oxygen-lawton1978": 0.0}, pressure_Pa=1e5, temperature_K=293)
    air = Mixture({"nitrogen-phelps1985": 0.8, "oxygen-schmalzried2023": 0.2})
    assert Composition.parse("N2").is_that_of(parts_of(nitrogen))
    assert not Composition.parse("air").is_that_of(parts_of(nitrogen))
    assert Composition.parse("dry air").is_that_of(parts_of(air))
    assert Composition.parse("0.2 O2 + 0.8 N2").is_that_of(parts_of(air))
    assert not Composition.parse("0.21 O2 + 0.79 N2").is_that_of(parts_of(air))
    assert str(Composition.parse("0.2 O2 + 0.8 N2")) == "0.8 N2 + 0.2 O2"
    for text in ("", "N2 + O2", "0.5 N2 + 0.5 N2", "+"):
        with pytest.raises(CompositionError):
            Composition.parse(text)


@pytest.mark.parametrize("name", sorted(shipped_data()))
def test_shipped_data_are_of_shipped_gases_and_name_their_sources(name):
    formulas = {load_named(gas).formula for gas in shipped_sets()}
    for datum in read_measured(shipped_data()[name]):
        assert {formula for formula, _ in datum.gas.parts} <= formulas
        assert datum.quantity in MEASURABLE
        assert any(mark in datum.source for mark in (", read", "from memory"))
        assert datum.standard_error >= 0.05 * datum.value  # what is remembered is not known better


def test_shipped_drift_of_nitrogen_is_as_published():
    # J. Fletcher and I. D. Reid, J. Phys. D 13, 2275 (1980), from memory: 1.05e5 m/s at 100 Td.
    (datum,) = [
        datum
        for datum in read_measured(shipped_data()["nitrogen"])
        if datum.quantity == "drift_velocity_bulk" and datum.E_over_N_Td == 100.0
    ]
    assert datum.value == 1.05e5


RUN = """
[gas]
temperature_K = 293
fractions = [{ "nitrogen-phelps1985" = 1.0 }, { "oxygen-schmalzried2023" = 1.0 }]
[field]
E_over_N_Td = "measured"
[accuracy]
mean_energy = 0.01
[measured]
"""


def test_fields_of_a_run_are_those_of_its_gas(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(RUN, encoding="utf-8")
    run_file = load_run_file(path)
    fields = {}
    for point in run_file.points:
        fields.setdefault(point.mixture.describe(), []).append(point.field.E_over_N_Td)
    oxygen, nitrogen = fields["1 oxygen-schmalzried2023"], fields["1 nitrogen-phelps1985"]
    # 0.5 to 30 V/(m Pa) at 15 C, one of which is k 288.15 K = 3.97834 Td
    assert oxygen == pytest.approx([3.97834 * field for field in (0.5, 2, 3, 5, 10, 30)], rel=1e-5)
    assert {10.0, 30.0, 100.0} <= set(nitrogen)
    assert run_file.parameters["field"]["E_over_N_Td"] == "measured"


def test_a_results_folder_keeps_the_data(tmp_path, stand_in):
    write(tmp_path, GOOD)
    path = tmp_path / "case.toml"
    path.write_text(RUN.replace(', { "oxygen-schmalzried2023" = 1.0 }', "") + 'files = ["data.csv"]', encoding="utf-8")
    outcome = run_campaign(load_run_file(path), tmp_path / "results", workers=1)
    (kept,) = read_measured(outcome.folder / "measured.csv")
    assert (kept.E_over_N_Td, kept.value) == (10.0, pytest.approx(1.85e4))
    origin = open_results(outcome.folder).provenance
    assert origin["parameters"]["measured"] == {"files": ["data.csv"]}
    assert origin["mixtures"] == {"1 nitrogen-phelps1985": {"parts": {"N2": 1.0}, "three_body": False, "as_gas": True}}


def test_a_file_that_is_not_there_is_told_with_its_run_file(tmp_path):
    path = tmp_path / "case.toml"
    path.write_text(RUN + 'files = ["absent.csv"]', encoding="utf-8")
    with pytest.raises(RunFileError) as refusal:
        load_run_file(path)
    assert str(refusal.value).startswith(
        f"{path}, {tmp_path / 'absent.csv'}: cannot be read (No such file or directory)"
    )
