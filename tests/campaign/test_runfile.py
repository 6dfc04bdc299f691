"""Run files: what they give, and how each fault is told."""

import json

import pytest

from swarmgauge.campaign import RunFileError, load_run_file, run_file_schema
from swarmgauge.gas import InputError

GOOD = """
title = "a test"
seed = 7
[gas]
temperature_K = 293.15
pressure_Pa = 101325
fractions = { "nitrogen-phelps1985" = 0.8, "oxygen-lawton1978" = 0.2 }
[field]
E_over_N_Td = [30, 100, 300]
"""
COLD = """
[gas]
temperature_K = 0
fractions = { "argon-yamabe1983" = 1 }
[field]
E_over_N_Td = 10
"""


@pytest.fixture
def write(tmp_path):
    def write(text):
        path = tmp_path / "case.toml"
        path.write_text(text, encoding="utf-8")
        return path

    return write


def test_a_run_file_gives_its_points(write):
    run_file = load_run_file(write(GOOD))
    assert (run_file.name, run_file.title, run_file.seed) == ("case", "a test", 7)
    assert [point.field.E_over_N_Td for point in run_file.points] == [30, 100, 300]
    mixture = run_file.points[0].mixture
    assert mixture.describe() == "0.8 nitrogen-phelps1985 + 0.2 oxygen-lawton1978"
    assert (mixture.temperature_K, mixture.pressure_Pa) == (293.15, 101325)
    assert run_file.max_minutes_per_point == 5
    assert run_file.max_minutes is None
    assert repr(run_file) == "RunFile(case: a test; 3 points, seed 7)"


def test_what_is_left_out_has_the_pinned_defaults(write):
    run_file = load_run_file(write(COLD))
    assert run_file.seed == 1
    assert [str(target) for target in run_file.targets] == ["0.5 %", "0.5 %", "2 %", "3 % or 1e-23"]
    assert run_file.points[0].mixture.pressure_Pa is None


def test_points_are_the_product_of_all_lists(write):
    text = GOOD.replace("temperature_K = 293.15", "temperature_K = [293.15, 400]").replace(
        'fractions = { "nitrogen-phelps1985" = 0.8, "oxygen-lawton1978" = 0.2 }',
        'fractions = [{ "oxygen-lawton1978" = 1.0 }, { "nitrogen-phelps1985" = 0.5, "oxygen-lawton1978" = 0.5 }]',
    )
    points = load_run_file(write(text)).points
    assert len(points) == 2 * 2 * 3
    seen = [(p.mixture.describe(), p.mixture.temperature_K, p.field.E_over_N_Td) for p in points]
    assert seen == sorted(seen, key=lambda point: (point[0] != "1 oxygen-lawton1978", point[1:]))
    assert len(set(seen)) == len(seen)


def test_points_that_differ_only_in_an_angle_without_field_are_one(write):
    points = load_run_file(write(COLD + "B_over_N_Hx = 0\nB_angle_deg = [0, 45, 90]\n")).points
    assert len(points) == 1


def test_the_same_mixture_twice_is_one(write):
    text = COLD.replace("fractions = {", "fractions = [{ 'argon-yamabe1983' = 1.0 }, {").replace("= 1 }", "= 1 }]")
    assert len(load_run_file(write(text)).points) == 1


def test_a_set_is_found_by_its_path_from_the_run_file(write, tmp_path, monkeypatch):
    from swarmgauge.gas import load_named, write_set

    write_set(load_named("argon-yamabe1983"), tmp_path / "mine.toml")
    monkeypatch.chdir("/")
    path = write(COLD.replace("argon-yamabe1983", "mine.toml"))
    assert load_run_file(path).points[0].mixture.describe() == "1 argon-yamabe1983"


def test_left_out_processes_are_left_out_where_their_set_is(write):
    text = GOOD.replace(
        'fractions = { "nitrogen-phelps1985" = 0.8, "oxygen-lawton1978" = 0.2 }',
        'fractions = [{ "oxygen-lawton1978" = 1.0 }, { "nitrogen-phelps1985" = 1.0 }]\n'
        'leave_out = ["oxygen-lawton1978/attachment-3body"]',
    )
    oxygen, nitrogen = (load_run_file(write(text)).points[place].mixture for place in (0, 3))
    assert "attachment-3body" not in [process.id for process in oxygen.acting(oxygen.gases[0])]
    assert nitrogen.leave_out == ()


LEVELS = """
[gas]
temperature_K = 300
vibrational_temperature_K = [1000, 2000]
level_fractions = { "oxygen-lawton1978/a1delta" = 0.1 }
leave_out = ["oxygen-lawton1978/attachment-3body"]
fractions = [{ "oxygen-lawton1978" = 1 }, { "argon-yamabe1983" = 1 }, { "nitrogen-phelps1985" = 1 }]

[field]
E_over_N_Td = 10
"""


def test_populations_of_levels(write):
    points = load_run_file(write(LEVELS)).points
    assert [point.mixture.describe() for point in points] == [
        "1 oxygen-lawton1978 (vibration 1000 K; 0.1 in oxygen-lawton1978/a1delta)",
        "1 oxygen-lawton1978 (vibration 2000 K; 0.1 in oxygen-lawton1978/a1delta)",
        "1 argon-yamabe1983",  # has no levels that could vibrate
        "1 nitrogen-phelps1985 (vibration 1000 K)",
        "1 nitrogen-phelps1985 (vibration 2000 K)",
    ]
    assert points[0].mixture.populations(points[0].mixture.gases[0])["a1delta"] == 0.1


GAS, FIELD = '[gas]\ntemperature_K = 0\nfractions = { "argon-yamabe1983" = 1 }\n', "[field]\nE_over_N_Td = 10\n"
FAULTS = {
    "no gas": (FIELD, "[gas] is missing. Add the section, with temperature_K and fractions."),
    "no fields": (
        GAS + "[field]\n",
        "[field] E_over_N_Td is missing. Add it, for example E_over_N_Td = [30, 100, 300].",
    ),
    "unknown key": (
        GAS + "presure_Pa = 3\n" + FIELD,
        "[gas] presure_Pa: unknown key. Known keys: temperature_K, pressure_Pa, fractions, leave_out, "
        "vibrational_temperature_K, level_fractions. "
        "Did you mean pressure_Pa?",
    ),
    "misspelt key": (
        GAS.replace("temperature_K", "temperatur_K") + FIELD,
        "[gas] temperatur_K: unknown key. Known keys: temperature_K, pressure_Pa, fractions, leave_out, "
        "vibrational_temperature_K, level_fractions. "
        "Did you mean temperature_K?",
    ),
    "unknown section": (
        GAS + FIELD + "[acuracy]\n",
        "acuracy: unknown key. Known keys: title, seed, gas, field, accuracy, measured, sensitivity. "
        "Did you mean accuracy?",
    ),
    "section is a number": ("gas = 3\n" + FIELD, "[gas] = 3: Give a section with its keys."),
    "text for number": (GAS.replace("= 0", '= "warm"') + FIELD, '[gas] temperature_K = "warm": Give a number.'),
    "truth for number": (GAS.replace("= 0", "= true") + FIELD, "[gas] temperature_K = true: Give a number."),
    "number in list": (
        GAS.replace("= 0", '= [0, "x"]') + FIELD,
        '[gas] temperature_K, item 2 = "x": Give a number.',
    ),
    "nan": (GAS.replace("= 0", "= nan") + FIELD, "[gas] temperature_K = nan: Give a finite number."),
    "negative field": (
        GAS + "[field]\nE_over_N_Td = [1, -1]",
        "[field] E_over_N_Td, item 2 = -1: Give a number of 0 or more.",
    ),
    "infinite field": (
        GAS + "[field]\nE_over_N_Td = inf",
        "[field] E_over_N_Td = inf: Give a finite number.",
    ),
    "no fields in list": (GAS + "[field]\nE_over_N_Td = []", "[field] E_over_N_Td = []: Give at least one entry."),
    "empty sweep": (
        GAS + "[field]\nE_over_N_Td = { from = 100, to = 10, per_decade = 4 }",
        "[field] E_over_N_Td: from = 100 is above to = 10: the sweep is empty. Swap them.",
    ),
    "sweep from zero": (
        GAS + "[field]\nE_over_N_Td = { from = 0, to = 10, per_decade = 4 }",
        "[field] E_over_N_Td, from = 0: Give a number above 0.",
    ),
    "sweep with a wrong key": (
        GAS + "[field]\nE_over_N_Td = { from = 1, to = 10, per_decad = 4 }",
        "[field] E_over_N_Td, per_decad: unknown key. Known keys: from, to, per_decade. Did you mean per_decade?",
    ),
    "sweep without end": (
        GAS + "[field]\nE_over_N_Td = { from = 1, per_decade = 4 }",
        "[field] E_over_N_Td, to is missing. Add it, for example to = 500.",
    ),
    "word for fields": (
        GAS + '[field]\nE_over_N_Td = "all"',
        '[field] E_over_N_Td = "all": Give a list of fields, a sweep, or "measured" for those of [measured] files.',
    ),
    "measured fields of nothing": (
        GAS + '[field]\nE_over_N_Td = "measured"',
        '[field] E_over_N_Td = "measured": there is no section [measured]. Add it, with files.',
    ),
    "measured in another gas": (
        GAS + '[field]\nE_over_N_Td = "measured"\n[measured]\nfiles = ["helium"]',
        '[field] E_over_N_Td = "measured": nothing was measured in 1 argon-yamabe1983; the files hold He. '
        "Give a list of fields, or other files.",
    ),
    "no measured files": (
        GAS + FIELD + "[measured]\nfiles = []",
        "[measured] files = []: Give at least one entry.",
    ),
    "magnetic field": (
        GAS + FIELD + "B_over_N_Hx = [0, 100]",
        "[field] B_over_N_Hx = [0, 100]: only 0 is available in this version. Remove the key.",
    ),
    "frequency": (
        GAS + FIELD + "frequency_Hz = 2.45e9",
        "[field] frequency_Hz = 2450000000.0: only 0 is available in this version. Remove the key.",
    ),
    "section to come": (
        GAS + FIELD + "[refine]\n",
        "[refine]: not available in this version of swarmgauge. Remove the section.",
    ),
    "electrons at rest": (
        GAS + "[field]\nE_over_N_Td = [0, 1]",
        "[field] E_over_N_Td = 0 at [gas] temperature_K = 0: electrons come to rest. Leave one out.",
    ),
    "negative fraction": (
        GAS.replace("= 1 }", "= -1 }") + FIELD,
        "[gas] fractions, argon-yamabe1983 = -1: Give a number of 0 or more.",
    ),
    "no fractions": (
        GAS.replace('"argon-yamabe1983" = 1', "") + FIELD,
        "[gas] fractions = {}: Give at least one entry.",
    ),
    "fractions are a number": (
        GAS.replace('{ "argon-yamabe1983" = 1 }', "1") + FIELD,
        '[gas] fractions = 1: Give a table such as { "<set>" = 1.0 }.',
    ),
    "unknown set to leave out of": (
        GAS + 'leave_out = ["argon/elastic"]\n' + FIELD,
        '[gas] leave_out: "argon/elastic" names no set of this run (argon-yamabe1983). Write "<set>/<process>".',
    ),
    "unknown set with levels": (
        GAS + 'level_fractions = { "argon/x" = 0.1 }\n' + FIELD,
        '[gas] level_fractions: "argon/x" names no set of this run (argon-yamabe1983). Write "<set>/<process>".',
    ),
    "negative seed": ("seed = -1\n" + GAS + FIELD, "seed = -1: Give a number of 0 or more."),
    "broken seed": ("seed = 1.5\n" + GAS + FIELD, "seed = 1.5: Give a whole number."),
    "title": ("title = 3\n" + GAS + FIELD, "title = 3: Give text in quotes."),
    "no time": (
        GAS + FIELD + "[accuracy]\nmax_minutes = 0",
        "[accuracy] max_minutes = 0: Give a number above 0.",
    ),
    "misspelt limit": (
        GAS + FIELD + "[accuracy]\nmax_minute = 3",
        "[accuracy] max_minute: unknown key. Did you mean max_minutes?",
    ),
}


@pytest.mark.parametrize("fault", FAULTS)
def test_a_fault_is_told_in_one_line(write, fault):
    text, line = FAULTS[fault]
    path = write(text)
    with pytest.raises(InputError) as caught:
        load_run_file(path)
    assert str(caught.value) == f"{path}, {line}"


# Faults that the packages below find: the line starts with file and place, and names what to do.
FAULTS_BELOW = {
    "sum of fractions": (GAS.replace("= 1 }", "= 0.9 }"), ("[gas]: ", "sum to 0.9", "Correct them")),
    "unknown set": (
        GAS.replace("argon-yamabe1983", "argon-yamabe1982"),
        ("[gas] fractions: ", '"argon-yamabe1982" is unknown', "Did you mean argon-yamabe1983?"),
    ),
    "absent set file": (
        GAS.replace("argon-yamabe1983", "sets/none.toml"),
        ("[gas] fractions: ", "none.toml: cannot be read", "Check the path"),
    ),
    "three bodies without pressure": (
        GAS.replace("argon-yamabe1983", "oxygen-lawton1978").replace("= 0", "= 293"),
        ("[gas]: ", "oxygen-lawton1978/attachment-3body", "Give pressure_Pa"),
    ),
    "pressure of a cold gas": (GAS + "pressure_Pa = 1\n", ("[gas]: ", "pressure_Pa = 1", "Give a temperature")),
    "unknown process to leave out": (
        GAS + 'leave_out = ["argon-yamabe1983/elastik"]\n',
        ("[gas]: leave_out", "argon-yamabe1983/elastik", "Did you mean argon-yamabe1983/elastic?"),
    ),
    "vibration of atoms": (
        GAS + "vibrational_temperature_K = 1000\n",
        ("[gas]: ", "no set of this mixture has a level marked as vibrational", "Leave it out"),
    ),
    "no such level": (
        GAS + 'level_fractions = { "argon-yamabe1983/total" = 0.1 }\n',
        ("[gas]: ", '"argon-yamabe1983/total" is not a process of this mixture', "the levels are none"),
    ),
    "per cent": (GAS + "[accuracy]\nmean_energy = 0.5\n", ("[accuracy]: ", "50 %", "divide by 100")),
    "unknown quantity": (
        GAS + "[accuracy]\ndrift_velocity = 0.01\n",
        ("[accuracy]: ", "no such quantity", "drift_velocity_flux"),
    ),
    "process of no set": (
        GAS + '[accuracy]\n"rate:argon/ionization" = 0.01\n',
        (
            '[accuracy]: accuracy "rate:argon/ionization"',
            "no mixture here has",
            "Did you mean argon-yamabe1983/ionization?",
        ),
    ),
    "target key": (GAS + "[accuracy]\nmean_energy = { real = 0.01 }\n", ("[accuracy]: ", "real", "Known keys: rel")),
}


@pytest.mark.parametrize("fault", FAULTS_BELOW)
def test_a_fault_found_below_is_placed(write, fault):
    text, parts = FAULTS_BELOW[fault]
    path = write(text + FIELD)
    with pytest.raises(InputError) as caught:
        load_run_file(path)
    message = str(caught.value)
    assert message.startswith(f"{path}, {parts[0]}")
    assert "\n" not in message
    for part in parts:
        assert part in message


def test_several_faults_are_told_at_once(write):
    path = write(GAS.replace("= 0", '= "warm"') + FIELD + "B_T = 1\n[accuracy]\nmax_minutes = -1\n")
    with pytest.raises(RunFileError) as caught:
        load_run_file(path)
    lines = str(caught.value).splitlines()
    assert len(lines) == 3
    assert all(line.startswith(f"{path}, [") for line in lines)


def test_text_that_is_not_toml(write):
    path = write("[gas\n")
    with pytest.raises(InputError, match=r"case\.toml: is not TOML: .*line 1.*Correct the text there\."):
        load_run_file(path)


def test_unreadable_files(tmp_path):
    with pytest.raises(InputError, match=r"none\.toml: cannot be read \(No such file or directory\)"):
        load_run_file(tmp_path / "none.toml")
    with pytest.raises(InputError, match="is a folder, not a file"):
        load_run_file(tmp_path)
    (tmp_path / "latin.toml").write_bytes(b'title = "\xe9"')
    with pytest.raises(InputError, match="is not UTF-8"):
        load_run_file(tmp_path / "latin.toml")


def test_schema_knows_every_key_of_the_file():
    schema = run_file_schema()
    json.dumps(schema)
    assert set(schema["properties"]) == {"title", "seed", "gas", "field", "accuracy", "measured", "sensitivity"}
    keys = {name: set(part["properties"]) for name, part in schema["$defs"].items()}
    assert keys["Sweep"] == {"from", "to", "per_decade"}
    assert keys["GasSection"] == {
        "temperature_K",
        "pressure_Pa",
        "fractions",
        "leave_out",
        "vibrational_temperature_K",
        "level_fractions",
    }
    assert "E_over_N_Td" in keys["FieldSection"]
