"""Columns into set files: what is asked, what is written, what is left alone."""

import numpy as np
import pytest

from swarmgauge.gas import InputError, load_set
from swarmgauge.gas.columns.imported import import_file
from swarmgauge.gas.columns.request import COLUMN_KEYS, Request, request_of

ROWS = "0.977 0\n1.5 0.58\n3 3.8\n7 9.11\n20 2\n"
ENERGY = ["1", "unit=eV"]
EXCITATION = [
    "2",
    "id=a1delta",
    "kind=excitation",
    "threshold_eV=0.977",
    "unit=1e-22m2",
    "beyond=-1.4",
    "source=a beam",
]
TOP = ["formula=O2", "molar_mass_g_per_mol=31.998", "elastic_is=momentum_transfer", "source=ours", "rights=free"]


@pytest.fixture
def files(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    (tmp_path / "rows.txt").write_text(ROWS, encoding="utf-8")
    return tmp_path


def imported(folder, energy=ENERGY, each=(), columns=(EXCITATION,), top=TOP, file="rows.txt", **options):
    return import_file(file, request_of(energy, each, columns, top), folder / "mine.toml", **options)


def test_a_new_set(files):
    done = imported(files)
    gas = load_set(files / "mine.toml")
    assert done.new == ("a1delta",)
    assert done.rows == 5
    assert gas.canonical() == done.gas.canonical()
    assert (gas.name, gas.formula, gas.molar_mass_g_per_mol, gas.rights) == ("mine", "O2", 31.998, "free")
    assert gas.note == "Imported from rows.txt: energy from column 1 in eV; a1delta from column 2 in 1e-22m2."
    (process,) = gas.processes
    assert (process.kind, process.threshold_eV, process.source, process.law.beyond) == (
        "excitation",
        0.977,
        "a beam",
        -1.4,
    )
    assert process.law.energy_eV.tolist() == [0.977, 1.5, 3.0, 7.0, 20.0]
    assert process.law.cross_section_m2.tolist() == [0.0, 0.58e-22, 3.8e-22, 9.11e-22, 2e-22]


def test_adding_leaves_the_file_as_it_was(files):
    imported(files)
    path = files / "mine.toml"
    before = path.read_text(encoding="utf-8").replace("[[process]]", "# a remark\n[[process]]")
    path.write_text(before, encoding="utf-8")
    elastic = ["2", "id=elastic", "kind=elastic", "unit=bohr2", "beyond=hold", "source=theory", "label=all angles"]
    done = imported(files, columns=[elastic], top=[])
    after = path.read_text(encoding="utf-8")
    assert after.startswith(before)
    assert after.endswith("\n")
    assert done.new == ("elastic",)
    gas = load_set(path)
    assert [process.id for process in gas.processes] == ["elastic", "a1delta"]
    assert gas.process("elastic").label == "all angles"
    # a0 = 5.29177210903e-11 m, CODATA 2018
    assert gas.process("elastic").law.cross_section_m2[1] == pytest.approx(0.58 * 5.29177210903e-11**2, rel=1e-12)


def test_several_columns_and_what_they_share(files):
    (files / "wide.csv").write_text("10;0;0,5\n20;1,5;0,75\n30;2;1\n", encoding="utf-8")
    done = imported(
        files,
        energy=["1", "unit=K"],
        each=["unit=angstrom2", "source=table 3", "kind=excitation", "beyond=zero", "threshold_eV=0.001"],
        columns=[["2", "id=j0"], ["3", "id=j2", "source=table 4", "passive=true"]],
        file="wide.csv",
        decimal_comma=True,
    )
    first, second = done.gas.process("j0"), done.gas.process("j2")
    assert (first.source, second.source, first.passive, second.passive) == ("table 3", "table 4", False, True)
    assert second.law.cross_section_m2.tolist() == [0.5e-20, 0.75e-20, 1e-20]
    # k / e = 8.617333e-5 eV/K, CODATA
    np.testing.assert_allclose(first.law.energy_eV, np.array([10.0, 20.0, 30.0]) * 8.617333e-5, rtol=1e-6)


def test_from_high_to_low_energy(files):
    (files / "rows.txt").write_text("\n".join(reversed(ROWS.splitlines())), encoding="utf-8")
    law = imported(files).gas.process("a1delta").law
    assert law.energy_eV[0] == 0.977
    assert law.cross_section_m2[-1] == 2e-22


def test_three_bodies_have_their_own_unit(files):
    words = ["2", "id=three", "kind=attachment", "threshold_eV=0", "beyond=zero", "source=s", "third_body=self"]
    assert imported(files, columns=[[*words, "unit=1e-40cm5"]]).gas.process("three").law.cross_section_m2[1] == 0.58e-50
    (files / "mine.toml").unlink()
    with pytest.raises(InputError, match=r"column 2: unit = cm2 is unknown. .*Known units: m5, cm5"):
        imported(files, columns=[[*words, "unit=cm2"]])


def test_questions_in_one_line(files):
    with pytest.raises(InputError, match="nothing was written") as caught:
        import_file("rows.txt", Request(), files / "mine.toml")
    text = str(caught.value)
    assert "\n" not in text
    for words in ("which column holds the energy?", "in which unit is the energy", "which columns hold", "molar mass"):
        assert words in text
    assert [path.name for path in files.iterdir()] == ["rows.txt"]


@pytest.mark.parametrize("key", ["id", "kind", "threshold_eV", "unit", "beyond", "source"])
def test_what_a_column_lacks_is_asked(files, key):
    words = [word for word in EXCITATION if not word.startswith(key + "=")]
    with pytest.raises(InputError, match=rf"--column 2 {key}=") as caught:
        imported(files, columns=[words])
    assert str(caught.value).count("? (") == 1


@pytest.mark.parametrize("key", ["formula", "molar_mass_g_per_mol", "elastic_is", "source", "rights"])
def test_what_a_new_set_lacks_is_asked(files, key):
    with pytest.raises(InputError, match=rf"--set {key}="):
        imported(files, top=[word for word in TOP if not word.startswith(key + "=")])


def test_answers_make_the_same_file(files):
    imported(files)
    wanted = (files / "mine.toml").read_bytes()
    (files / "mine.toml").unlink()
    known = dict(word.split("=") for word in TOP)
    own = dict(word.split("=") for word in EXCITATION[1:])
    said = []

    def ask(question, trouble):
        said.append(trouble)
        where, key = question.place
        if where == "energy":
            return "1" if key == "column" else "eV"
        if key == "columns":
            return "2"
        if key == "kind" and "unknown" not in trouble:
            return "excited"
        return known[key] if where == "set" else own[key]

    import_file("rows.txt", Request(), files / "mine.toml", ask=ask)
    assert (files / "mine.toml").read_bytes() == wanted
    assert [trouble for trouble in said if trouble] == [
        "kind = excited is unknown. Did you mean excitation? Known: elastic, excitation, ionization, attachment."
    ]


FAULTS = [
    ({"energy": ["0", "unit=eV"]}, "0 is not the number of a column"),
    ({"energy": ["3", "unit=eV"]}, "rows.txt, column 2: there is no column 3: rows have 2 numbers"),
    ({"energy": ["2", "unit=eV"]}, "rows.txt, column 2: is the energy"),
    ({"energy": ["1", "unit=cm2"]}, "--energy: unit = cm2 is unknown"),
    ({"energy": ["1", "in=eV"]}, "--energy: key in is unknown"),
    ({"columns": [[*EXCITATION, "energy_eV=3"]]}, "--column 2: key energy_eV is unknown"),
    ({"columns": [[*EXCITATION, "treshold_eV=3"]]}, "Did you mean threshold_eV?"),
    ({"columns": [[*EXCITATION, "unit=m2"]]}, "--column 2: unit is given twice"),
    ({"columns": [[*EXCITATION, "passive"]]}, "passive is not of the form key=value"),
    ({"columns": [[*EXCITATION, "passive=maybe"]]}, "process a1delta, passive"),
    ({"columns": [[*EXCITATION, "label="]]}, "label has no value"),
    ({"columns": [EXCITATION, EXCITATION]}, "--column 2 is given twice"),
    ({"columns": [[*EXCITATION[:3], "threshold_eV=high", *EXCITATION[4:]]]}, "threshold_eV = high is not a number"),
    ({"columns": [[*EXCITATION[:3], "threshold_eV=99", *EXCITATION[4:]]]}, "lies above the end of the table"),
    ({"lines": "3"}, "--lines 3 is not a range"),
    ({"lines": "4-2"}, "--lines 4-2 is not a range"),
    ({"file": "none.txt"}, "none.txt: cannot be read"),
    ({"top": [*TOP, "name=other"]}, "--set: key name is unknown"),
]


@pytest.mark.parametrize(("change", "words"), FAULTS)
def test_faults_are_named_and_nothing_is_written(files, change, words):
    with pytest.raises(InputError) as caught:
        imported(files, **change)
    assert words in str(caught.value)
    assert "\n" not in str(caught.value)
    assert [path.name for path in files.iterdir()] == ["rows.txt"]


def test_an_existing_set_is_not_changed_in_passing(files):
    imported(files)
    before = (files / "mine.toml").read_bytes()
    with pytest.raises(InputError, match=r"exists, so --set formula, .* would change it"):
        imported(files, columns=[["2", "id=other", *EXCITATION[2:]]])
    with pytest.raises(InputError, match="the id is used more than once"):
        imported(files, top=[])
    assert (files / "mine.toml").read_bytes() == before
    assert len(list(files.iterdir())) == 2


def test_negative_values_are_refused_with_their_row(files):
    (files / "rows.txt").write_text(ROWS.replace("0.58", "-0.58"), encoding="utf-8")
    with pytest.raises(InputError, match=r"process a1delta, row 2: cross section -5.8e-23 m2"):
        imported(files)


def test_no_place_to_write(files):
    with pytest.raises(InputError, match=r"mine.toml: cannot be written"):
        imported(files / "missing", file=str(files / "rows.txt"))


def test_all_keys_of_a_process_can_be_given():
    assert {"degeneracy_lower", "third_body", "sharing", "relative_uncertainty", "unit", "beyond"} <= set(COLUMN_KEYS)
    assert not {"energy_eV", "cross_section_m2", "ramp", "power_law"} & set(COLUMN_KEYS)
