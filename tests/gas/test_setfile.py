"""Set files: what is read and written has the same bits; what is wrong is told in one clear line."""

import json
import math
import string

import numpy as np
import pytest
import tomli_w
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from swarmgauge.gas import (
    AngleTable,
    Gas,
    PowerLaw,
    Process,
    Ramp,
    SetFileError,
    Sharing,
    Table,
    load_named,
    load_set,
    set_file_schema,
    set_text,
    shipped_sets,
    write_set,
)


def bits(gas):
    """All that a set file holds, floats as hexadecimal digits, which tell -0.0 from 0.0."""

    def plain(value):
        if isinstance(value, float | int) and not isinstance(value, bool):
            return float(value).hex()
        if isinstance(value, np.ndarray):
            return [float(number).hex() for number in value.ravel()]
        if isinstance(value, dict):
            return {key: plain(inner) for key, inner in value.items()}
        if isinstance(value, tuple | list):
            return [plain(inner) for inner in value]
        if isinstance(value, Process | Table | PowerLaw | Ramp | Sharing | AngleTable):
            return {name: plain(inner) for name, inner in vars(value).items()}
        return value

    return {name: plain(value) for name, value in vars(gas).items() if name not in ("clipped", "warnings")}


def test_a_set_file_is_read(written, content):
    content["process"][1] |= {"degeneracy_lower": 1, "degeneracy_upper": 3, "relative_uncertainty": 0.1}
    content["process"].append(
        {
            "id": "capture",
            "kind": "attachment",
            "threshold_eV": 0.0,
            "label": "three bodies",
            "source": "invented",
            "power_law": {"at_1_eV_m2": 1e-45, "exponent": -0.5},
            "third_body": {"O2": 1, "N2": 0.02},
            "passive": True,
        }
    )
    content["process"][2]["sharing"] = {"fraction": 0.3}
    content |= {"trusted_E_over_N_Td": [30, 1000], "table_temperature_K": 300}
    gas = load_set(written(content))
    assert (gas.name, gas.formula, gas.trusted_E_over_N_Td, gas.table_temperature_K) == ("toy", "X2", (30, 1000), 300)
    assert [process.id for process in gas.processes] == ["elastic", "capture", "v1", "ion"]  # by threshold
    assert gas.process("ion").sharing == Sharing("fixed", 0.3)
    assert gas.process("capture").third_body == {"O2": 1.0, "N2": 0.02}
    assert gas.process("capture").passive
    v1 = gas.process("v1")
    assert (v1.degeneracy_lower, v1.degeneracy_upper, v1.relative_uncertainty) == (1.0, 3.0, 0.1)
    assert gas.process("elastic").law.beyond == -0.5
    assert repr(gas) == "Gas(toy: X2, 4 processes)"
    with pytest.raises(KeyError):
        gas.process("v2")


def test_a_byte_order_mark_is_no_fault(written, content):
    path = written(content)
    path.write_bytes(b"\xef\xbb\xbf" + path.read_bytes())
    assert load_set(path).name == "toy"


@pytest.mark.parametrize("name", shipped_sets())
def test_shipped_sets_come_back_bit_for_bit(name, tmp_path):
    gas = load_named(name)
    path = tmp_path / f"{name}.toml"
    write_set(gas, path)
    assert bits(load_set(path)) == bits(gas)
    assert path.read_text(encoding="utf-8") == shipped_sets()[name].read_text(encoding="utf-8")


numbers = st.floats(0.0, 1e30, allow_nan=False) | st.sampled_from([0.0, -0.0, 5e-324, 1e30, 0.1, 1 / 3])
texts = st.text(st.characters(exclude_categories=["Cs"]), max_size=30)
names = st.text(string.ascii_letters + string.digits, min_size=1, max_size=8)
positive = st.floats(1e-300, 1e30)


@st.composite
def tables(draw):
    energy = draw(st.lists(numbers, min_size=2, max_size=30, unique=True).map(sorted))
    section = draw(st.lists(numbers, min_size=len(energy), max_size=len(energy)))
    return Table(energy, section, draw(st.sampled_from(["zero", "hold"]) | st.floats(-20.0, 20.0)))


laws = tables() | st.builds(PowerLaw, numbers, st.floats(-20.0, 20.0)) | st.builds(Ramp, numbers, numbers)
sharings = st.sampled_from([Sharing(), Sharing("equal")]) | st.floats(0.0, 1.0).map(lambda part: Sharing("fixed", part))
bodies = st.none() | st.sampled_from(["self", "any"]) | st.dictionaries(texts, positive, min_size=1, max_size=3)


@st.composite
def processes(draw, name):
    law = draw(laws)
    kind = draw(st.sampled_from(["excitation", "ionization", "attachment"]))
    more = {"sharing": draw(sharings)} if kind == "ionization" else {}
    more |= {"third_body": draw(bodies)} if kind == "attachment" else {}
    if kind == "excitation":
        weights = draw(st.none() | st.tuples(st.floats(1e-9, 1e6), st.floats(1e-9, 1e6)))
        more |= {"vibrational": draw(st.booleans())}
        more |= dict(zip(("degeneracy_lower", "degeneracy_upper"), weights, strict=True)) if weights else {}
    return Process(
        id=name,
        kind=kind,
        threshold_eV=draw(st.floats(0.0, min(law.end_eV, 1e30))),
        law=law,
        label=draw(texts),
        source=draw(texts),
        passive=draw(st.booleans()),
        relative_uncertainty=draw(st.none() | positive),
        **more,
    )


@st.composite
def gases(draw):
    ids = draw(st.lists(names, min_size=1, max_size=4, unique=True))
    return Gas(
        name=draw(names),
        formula=draw(names),
        molar_mass_g_per_mol=draw(st.floats(1e-6, 1e6)),
        elastic_is=draw(st.sampled_from(["momentum_transfer", "integral"])),
        published=tuple(draw(processes(name)) for name in ids),
        source=draw(texts),
        rights=draw(texts),
        note=draw(texts),
        trusted_E_over_N_Td=draw(st.none() | st.just((0.1, 1e3)) | st.just((1 / 3, 2 / 3))),
        table_temperature_K=draw(st.none() | st.floats(0.0, 1e4)),
    )


@given(gas=gases())
@settings(
    max_examples=100,
    derandomize=True,
    deadline=None,
    suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow],
)
def test_any_set_comes_back_bit_for_bit(gas, tmp_path):
    path = tmp_path / "any.toml"
    path.write_text(set_text(gas), encoding="utf-8", newline="\n")
    assert bits(load_set(path)) == bits(gas)


@pytest.mark.parametrize(
    ("elastic", "ionization"),
    [
        ({"screened": -0.25, "convert": True}, {"sharing": {"width_eV": 15.8}, "ejecta": "binary"}),
        (
            {"screened": {"energy_eV": [0.1, 1, 30], "parameter": [0, 0.1, 0.9]}, "convert": True},
            {"sharing": {"ejected_eV": [0, 5, 50], "density": [1, 0.5, 0]}, "scattering": "forward"},
        ),
        (
            {"momentum_transfer_ratio": {"energy_eV": [0.1, 30], "ratio": [1.05, 0.3]}, "convert": True},
            {"scattering": {"screened": 0.9}},
        ),
        (
            {"angles_deg": [0, 12.5, 180], "energy_eV": [0.1, 7], "shape": [[1, 1, 1], [3, 1, 0.1]], "convert": True},
            {"scattering": "isotropic"},
        ),
    ],
)
def test_angular_laws_and_sharing_come_back(tmp_path, written, content, elastic, ionization):
    for process in content["process"]:
        if process["kind"] == "elastic":
            process["scattering"] = elastic
        if process["kind"] == "ionization":
            process |= ionization
    gas = load_set(written(content))
    path = tmp_path / "again.toml"
    path.write_text(set_text(gas), encoding="utf-8", newline="\n")
    again = load_set(path)
    assert again.canonical() == gas.canonical()
    canonical = {process["kind"]: process for process in gas.canonical()["processes"]}
    assert canonical["elastic"]["scattering"]["convert"] is True
    assert canonical["ionization"]["sharing"][0] == (
        "uniform"
        if "sharing" not in ionization
        else {"width_eV": "width", "ejected_eV": "table"}[next(iter(ionization["sharing"]))]
    )


def test_an_existing_file_is_not_overwritten(written, content):
    path = written(content)
    before = path.read_bytes()
    with pytest.raises(SetFileError, match=r"exists already and is not overwritten\. Choose another name"):
        write_set(load_set(path), path)
    assert path.read_bytes() == before
    with pytest.raises(SetFileError, match=r"toy.toml: cannot be written \(.*\). Check the folder"):
        write_set(load_set(path), path.parent / "none" / "toy.toml")


def change(*steps):
    """A change of the content: keys and numbers that lead to a value, then the value (None deletes the key)."""
    *way, last, value = steps

    def act(content):
        place = content
        for step in way:
            place = place[step]
        if value is None:
            del place[last]
        else:
            place[last] = value

    return act


ION, V1, ELASTIC = ("process", 2), ("process", 1), ("process", 0)
RISING = [0.5, 3.0, 2.0]
FAULTS = [
    (change("name", None), '{file}, key "name" is missing. Add it: name of the set'),
    (change("nam", "x"), '{file}, key "nam" is unknown. Did you mean name? Known keys: name, formula,'),
    (change("name", "a/b"), "{file}, name = 'a/b' cannot be a name. Use letters"),
    (change("name", 5), "{file}, name = 5 is not text in quotes. Write text in quotes."),
    (change("formula", ""), "{file}, formula = '' cannot be a formula. Write it without spaces"),
    (
        change("molar_mass_g_per_mol", "heavy"),
        '{file}, molar_mass_g_per_mol = "heavy" is not a number. Write a number.',
    ),
    (
        change("molar_mass_g_per_mol", 0),
        "{file}, molar_mass_g_per_mol = 0 is not possible. Give a finite number above 0",
    ),
    (change("molar_mass_g_per_mol", math.nan), "{file}, molar_mass_g_per_mol = nan is not possible. Give"),
    (change("molar_mass_g_per_mol", True), "{file}, molar_mass_g_per_mol = true is not a number."),
    (
        change("elastic_is", "total"),
        '{file}, elastic_is = "total" is not "momentum_transfer", "total_momentum_transfer"',
    ),
    (change("trusted_E_over_N_Td", [1]), "{file}, trusted_E_over_N_Td has 1 entries. Give exactly 2."),
    (change("trusted_E_over_N_Td", [9, 1]), "{file}, trusted_E_over_N_Td = [9, 1] is not a range. Give the lowest"),
    (change("table_temperature_K", -1), "{file}, table_temperature_K = -1 is not possible. Give"),
    (change("process", None), '{file}, key "process" is missing. Add it'),
    (change("process", []), "{file}, there is no process. Add at least one [[process]]."),
    (change("process", 3), "{file}, process = 3 is not a list, [...]. Write"),
    (change("process", 1, 7), "{file}, process number 2 is 7. Write a table"),
    (change(*V1, "id", None), '{file}, process number 2, key "id" is missing. Add it: short name'),
    (change(*V1, "id", ""), "{file}, process number 2, id = '' cannot be a name. Use"),
    (change(*V1, "id", "ion"), "{file}, process ion: the id is used more than once. Give each process its own id."),
    (change(*V1, "id", "two\nlines"), r"{file}, process two\nlines, id = 'two\nlines' cannot be a name. Use"),
    (change(*V1, "kind", "exitation"), '{file}, process v1, kind = "exitation" is not "elastic", "excitation", "ioni'),
    (change(*V1, "kind", None), '{file}, process v1, key "kind" is missing. Add it'),
    (change(*V1, "labl", "x"), '{file}, process v1, key "labl" is unknown. Did you mean label? Known keys: id, kind'),
    (change(*V1, "threshold_eV", "0.5"), '{file}, process v1, threshold_eV = "0.5" is not a number. Write a number.'),
    (change(*V1, "threshold_eV", -0.5), "{file}, process v1, threshold_eV = -0.5 is not possible. Give"),
    (
        change(*V1, "threshold_eV", 3.5),
        "{file}, process v1, threshold_eV = 3.5 lies above the end of the table (3 eV). C",
    ),
    (
        change(*ELASTIC, "threshold_eV", 1.0),
        "{file}, process elastic, threshold_eV = 1 for an elastic process. Set it to 0.",
    ),
    (
        change(*V1, "energy_eV", RISING),
        "{file}, process v1, row 3: energy 2 eV does not exceed the row before it (3 eV). Sort",
    ),
    (
        change(*V1, "energy_eV", [0.5, 1.0]),
        "{file}, process v1, energy_eV has 2 numbers and cross_section_m2 has 3. Give",
    ),
    (
        change(*V1, "energy_eV", [0.5, 1.0, "3"]),
        '{file}, process v1, energy_eV, row 3: "3": not a number. Write a number in',
    ),
    (change(*V1, "energy_eV", [[1.0]]), "{file}, process v1, energy_eV, row 1: [1.0]: not a number. Write"),
    (change(*V1, "energy_eV", 1.0), "{file}, process v1, energy_eV = 1.0 is not a list, [...]. Write"),
    (
        change(*V1, "energy_eV", 0, math.nan),
        "{file}, process v1, row 1: energy nan eV. Give finite numbers of 0 or more.",
    ),
    (change(*V1, "cross_section_m2", 1, -1e-20), "{file}, process v1, row 2: cross section -1e-20 m2. Give finite"),
    (change(*V1, "cross_section_m2", 1, math.nan), "{file}, process v1, row 2: cross section nan m2. Give finite"),
    (change(*V1, "cross_section_m2", 2, math.inf), "{file}, process v1, row 3: cross section inf m2. Give finite"),
    (change(*V1, "cross_section_m2", ["a"] * 9), '"a"; row 5: "a"; and 4 more rows: not a number. Write'),
    (change(*V1, "cross_section_m2", None), '{file}, process v1, key "cross_section_m2" is missing. Add it'),
    (
        change(*V1, "beyond", None),
        '{file}, process v1, key "beyond" is missing. Add it: what follows the last point ("zero", ',
    ),
    (
        change(*V1, "beyond", "hld"),
        '{file}, process v1, beyond = "hld" is not "zero", "hold" or { power = -0.9 }. Write',
    ),
    (change(*V1, "beyond", {"powr": -1}), '{file}, process v1, beyond, key "powr" is unknown. Did you mean power?'),
    (change(*V1, "beyond", {"power": -99}), "{file}, process v1, beyond: power = -99 is outside -20 to 20. Give"),
    (
        change(*V1, "ramp", {"from_eV": 1, "slope_m2_per_eV": 1}),
        "{file}, process v1, more than one cross section is given (",
    ),
    (
        change(*ION, "ramp", None),
        "{file}, process ion, no cross section is given. Give either energy_eV, cross_section_m2",
    ),
    (
        change(*ION, "ramp", "slope_m2_per_eV", -1),
        "{file}, process ion, ramp: slope_m2_per_eV = -1 is not possible. Give",
    ),
    (
        change(*ION, "ramp", "from_eV", None),
        '{file}, process ion, ramp, key "from_eV" is missing. Add it: energy where it s',
    ),
    (
        change(*ION, "sharing", "even"),
        '{file}, process ion, sharing = "even" is not "uniform", "equal", { fraction = 0.3 } or { width_eV = 13 }',
    ),
    (
        change(*ION, "sharing", {"fraction": 2}),
        "{file}, process ion, sharing: fraction = 2 is outside 0 to 1. Give the part",
    ),
    (change(*V1, "sharing", "equal"), "{file}, process v1, sharing is given for an excitation process. Remove it"),
    (change(*V1, "third_body", "self"), "{file}, process v1, third_body is given for an excitation process. Remove it"),
    (
        change(*V1, "scattering", "sideways"),
        '{file}, process v1, scattering = "sideways" is not "isotropic", "forward" or { screened = 0.5 }. W',
    ),
    (
        change(*V1, "scattering", {"screened": 1.0}),
        "{file}, process v1, scattering: screened: parameter, row 1: 1 is not between -1 and 1. Correct it",
    ),
    (
        change(*V1, "scattering", {"screened": 0.5, "shape": [[1.0, 2.0]]}),
        "{file}, process v1, scattering: screened, shape is given. Give either screened, or momentum_transfer_ratio",
    ),
    (
        change(*V1, "scattering", {"angles_deg": [0, 90], "energy_eV": [1], "shape": [[1.0, 2.0]]}),
        "{file}, process v1, scattering: angles_deg does not rise from 0 to 180. Give",
    ),
    (
        change(*V1, "scattering", {"angles_deg": [0, 90, 180], "energy_eV": [1], "shape": [[1.0, 2.0]]}),
        "{file}, process v1, scattering: shape has 1 x 2 numbers for 1 energies and 3 angles. Give a row",
    ),
    (
        change(*V1, "scattering", {"momentum_transfer_ratio": {"energy_eV": [1, 2], "ratio": [0.5, 2.5]}}),
        "{file}, process v1, scattering: momentum_transfer_ratio: ratio, row 2: 2.5 is not between 0.01 and 1.99",
    ),
    (change(*V1, "scattering", {"screened": 0.5, "convert": True}), "{file}, process v1, scattering: convert is given"),
    (change(*V1, "ejecta", "binary"), "{file}, process v1, ejecta is given for an excitation process. Remove it"),
    (
        change(*ION, "sharing", {"width_eV": -1}),
        "{file}, process ion, sharing: width_eV = -1 is not possible. Give 0.001 to 1e6 eV",
    ),
    (
        change(*ION, "sharing", {"ejected_eV": [1, 2], "density": [1, 1]}),
        "{file}, process ion, sharing: ejected_eV does not rise from 0. Give",
    ),
    (
        change(*V1, "lower", "v2"),
        '{file}, process v1: lower = "v2" is not another excitation of this set. Use the id of one',
    ),
    (change(*V1, "passive", "yes"), '{file}, process v1, passive = "yes" is not true or false. Write'),
    (change(*V1, "relative_uncertainty", 0), "{file}, process v1, relative_uncertainty = 0 is not possible. Give"),
    (change(*V1, "degeneracy_lower", -1), "{file}, process v1, degeneracy_lower = -1 is not possible. Give"),
]


@pytest.mark.parametrize(("fault", "message"), FAULTS)
def test_a_faulty_set_file_is_refused_in_one_line(fault, message, written, content):
    fault(content)
    path = written(content)
    with pytest.raises(SetFileError) as caught:
        load_set(path)
    said = str(caught.value)
    assert message.replace("{file}", str(path)) in said
    assert said.startswith(str(path))
    assert "\n" not in said
    assert said.isprintable()


def test_two_elastic_processes_are_refused(written, content):
    content["process"].append(content["process"][0] | {"id": "elastic2"})
    with pytest.raises(SetFileError, match=r"toy.toml, process elastic, elastic2: more than one elastic .* Keep one"):
        load_set(written(content))


def test_several_faults_have_a_line_each(written, content):
    change(*V1, "energy_eV", [0.5, 3.0, 2.0])(content)
    change(*ION, "threshold_eV", -1.0)(content)
    path = written(content)
    with pytest.raises(SetFileError) as caught:
        load_set(path)
    lines = str(caught.value).split("\n")
    assert len(lines) == 2
    assert lines[0].startswith(f"{path}, process v1, row 3")
    assert lines[1].startswith(f"{path}, process ion, threshold_eV = -1")
    content["process"] += [content["process"][2] | {"id": f"ion{i}"} for i in range(9)]
    with pytest.raises(SetFileError, match="and 5 more of such faults"):
        load_set(written(content))


def test_a_misspelt_key_is_one_fault(written, content):
    content["process"][1]["sorce"] = content["process"][1].pop("source")
    path = written(content)
    with pytest.raises(SetFileError) as caught:
        load_set(path)
    assert str(caught.value).startswith(f'{path}, process v1, key "sorce" is unknown. Did you mean source?')
    assert "\n" not in str(caught.value)


def test_all_missing_keys_in_one_line(written):
    path = written({})
    with pytest.raises(SetFileError) as caught:
        load_set(path)
    assert str(caught.value).startswith(f'{path}, keys "name", "formula", "molar_mass_g_per_mol"')
    assert str(caught.value).endswith("are missing. Add them.")
    assert "\n" not in str(caught.value)


@pytest.mark.parametrize(
    ("raw", "message"),
    [
        (b'name = "a"\nnote = "\xff"', "{file}, line 2: byte 0xff is not UTF-8. Save the file as UTF-8."),
        (b"name = = 1", "{file}: is not TOML: Invalid value (at line 1, column 8). Correct"),
        (b"a = " + b"[" * 30000, "{file}: is nested too deeply."),
        (b"a = " + b"9" * 5000, "{file}: is not TOML: "),
        (b"molar_mass_g_per_mol = 0x" + b"f" * 9000, "a huge number is not a number. Write a number."),
        (b"a = \x00", "{file}: is not TOML: "),
    ],
)
def test_a_file_that_is_no_toml_is_refused(raw, message, tmp_path):
    path = tmp_path / "raw.toml"
    path.write_bytes(raw)
    with pytest.raises(SetFileError) as caught:
        load_set(path)
    assert message.replace("{file}", str(path)) in str(caught.value)


def test_files_that_cannot_be_read(tmp_path):
    with pytest.raises(SetFileError, match=r"none.toml: cannot be read \(No such file or directory\). Check the path"):
        load_set(tmp_path / "none.toml")
    with pytest.raises(SetFileError, match=r"is a folder, not a file\. Give the path of a TOML file"):
        load_set(tmp_path)
    with pytest.raises(SetFileError, match="is a device or pipe, not a file"):
        load_set("/dev/zero")
    with pytest.raises(SetFileError, match=r"cannot be read \(embedded null"):
        load_set("with\0null")


def test_a_huge_file_is_not_even_read(tmp_path):
    path = tmp_path / "huge.toml"
    with path.open("wb") as file:
        file.truncate(10**9)  # sparse
    with pytest.raises(SetFileError, match=r"has 1000 MB, more than the 16 MB that are read\. Thin the tables"):
        load_set(path)


def test_a_shipped_set_must_bear_the_name_of_its_file(tmp_path, monkeypatch, content):
    (tmp_path / "other.toml").write_text(tomli_w.dumps(content), encoding="utf-8")
    monkeypatch.setattr("swarmgauge.gas.library.gases_folder", lambda: tmp_path)
    with pytest.raises(SetFileError, match=r'other.toml, name = "toy" differs from the name of the file. Make them'):
        load_named("other")


def test_schema_names_every_key(content):
    schema = json.loads(json.dumps(set_file_schema()))
    assert set(content) | {"trusted_E_over_N_Td", "table_temperature_K"} == set(schema["properties"])
    process = schema["$defs"]["ProcessEntry"]
    assert {"third_body", "sharing", "beyond", "power_law", "lower", "passive"} <= set(process["properties"])
    assert not process["additionalProperties"]
    assert set(process["required"]) == {"id", "kind", "threshold_eV", "label", "source"}
