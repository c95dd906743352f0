"""The set-up file: what it holds, every fault with its place, changes to it, and what a file can be."""

from pathlib import Path

import pytest

import envcorr
from envcorr.errors import InputError
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup, read_setup
from envcorr.intake.toml_file import LARGEST_FILE
from envcorr.setup import Correlation

BASE = """
[target]
resolution = "0.1 mg"
[load]
mass = "5 g"
"""
EXAMPLES = sorted((Path(envcorr.__file__).parent / "examples").glob("*.toml"))


@pytest.fixture
def read(tmp_path):
    """Write a text as a file and read it, with what a room check requires taken for granted unless said otherwise."""

    def read(text, *, require=(), changes=()):
        path = tmp_path / "station.toml"
        path.write_text(text, encoding="utf-8")
        return read_setup(path, require=require, changes=changes)

    return read


@pytest.fixture
def faults(read):
    """Return the faults of a text."""

    def faults(text, **options):
        with pytest.raises(InputError) as raised:
            read(text, **options)
        assert str(raised.value).replace("\n", "").isprintable()
        return [str(fault) for fault in raised.value.faults]

    return faults


# What is not an entry of a quantity ----------------------------------------------------------------------------------


def test_title_choices_and_what_was_written(read):
    setup = read(
        'title = "Bay 3"\n[load]\ninsulating = true\ndensity_kind = "envelope"\n'
        '[air]\ntemperature = "20 °C"\npressure = { value = "1000 hPa", u = "1 hPa" }\n[adjusted]\nwhen = "just before"'
    )
    assert setup.title == "Bay 3"
    assert setup.choices == {
        "load.insulating": "yes",
        "load.density_kind": "envelope",
        "adjusted.when": "just before",
    }
    assert setup.written["air.temperature"] == "20 °C"
    assert setup.written["air.pressure"] == "{ value = 1000 hPa, u = 1 hPa }"
    assert set(setup.written) == {*setup.estimates, *setup.choices}


@pytest.mark.parametrize(("written", "word"), [("true", "yes"), ("false", "no"), ('"yes"', "yes"), ('"no"', "no")])
def test_yes_and_no(read, written, word):
    assert read(f"[load]\ninsulating = {written}").choices == {"load.insulating": word}


def test_waived(read):
    assert read('[target]\nwaived = "buoyancy"').waived == {"buoyancy"}
    assert read('[target]\nwaived = ["buoyancy", "repeatability"]').waived == {"buoyancy", "repeatability"}
    assert read("[target]\nwaived = []").waived == frozenset()


AIR = """
[air]
temperature = { value = "20 °C", u = "0.3 K" }
pressure    = { value = "1000 hPa", u = "1 hPa" }
humidity    = { value = "45 %", u = "3 %" }
[sensors]
pressure = { u = "0.5 hPa" }
temperature = { u = "0.1 K" }
"""


def correlation(first, second, coefficient):
    return f'[[correlation]]\nbetween = ["{first}", "{second}"]\ncoefficient = {coefficient}\n'


def test_correlations(read):
    setup = read(
        AIR
        + correlation("air.temperature", "air.humidity", -0.5)
        + correlation("sensors.temperature", "sensors.pressure", 1)
    )
    assert setup.correlations == (
        Correlation("air.temperature", "air.humidity", -0.5),
        Correlation("sensors.air.temperature", "sensors.air.pressure", 1.0),
    )


def test_one_correlation_as_a_table(read):
    single = read(AIR + correlation("air.temperature", "air.humidity", -0.5).replace("[[", "[").replace("]]", "]"))
    assert single.correlations == (Correlation("air.temperature", "air.humidity", -0.5),)


def test_a_section_may_be_empty(read):
    assert read("[air]\n[tare]\n[adjusted]\n[sensors]\n[tare.air]\n").estimates == {}


@pytest.mark.parametrize("path", EXAMPLES, ids=[path.stem for path in EXAMPLES])
def test_the_examples_can_be_read(path):
    setup = read_setup(path)
    assert {"target.resolution", "load.mass"} <= set(setup.estimates)
    assert setup.title


# Faults, each with its place -----------------------------------------------------------------------------------------

FAULTS = [
    # words
    (
        '[load]\ndensity_kind = "gas displacement"',
        'load.density_kind: "gas displacement" is not one of its words. Did you mean "gas-displacement"? '
        'Known are "gas-displacement", "envelope", "solid", "liquid".',
    ),
    ('[load]\ninsulating = "maybe"', 'load.insulating: "maybe" is not one of its words. Known are "yes", "no".'),
    ("[adjusted]\nwhen = true", 'adjusted.when: "true" is not one of its words. Known are "just before", "unknown".'),
    (
        '[load]\ndensity_kind = "bulk"',
        'load.density_kind: "bulk" cannot be used. A bulk density counts the air between the grains',
    ),
    ('[load]\ndensity_kind = { value = "solid" }', "load.density_kind: \"{'value': 'solid'}\" is not one of its words"),
    ('[target]\nwaived = "buoyency"', 'target.waived: "buoyency" is not an effect. Did you mean buoyancy?'),
    ("[target]\nwaived = [3]", 'target.waived: "3" is not an effect. Known are buoyancy, '),
    ("title = 3", 'title: "3" is not a text. Write title = "Bay 3".'),
    # names
    ('[air]\ntemprature = "20 °C"', "air.temprature: is not known. Did you mean air.temperature?"),
    ('[Air]\ntemperature = "20 °C"', "Air.temperature: is not known. Did you mean air.temperature?"),
    ('[load]\ntemperature = "20 °C"', "load.temperature: is not known. Did you mean"),
    ('[room]\nwet_bulb = "20 °C"', "room.wet_bulb: is not known. Did you mean air.wet_bulb?"),
    ("[foo.bar.baz]\nx = 1", "foo.bar: is not known. See envcorr explain for every name."),
    ("titel = 3", "titel: is not known. Did you mean title?"),
    ("air = 3", 'air: "3" is not a section. Write [air] and its entries below.'),
    ("[tare]\nair = 3", 'tare.air: "3" is not a section. Write [tare.air] and its entries below.'),
    ('[[air]]\ntemperature = "20 °C"', "air: \"[{'temperature': '20 °C'}]\" is not a section."),
    ("[balance]\nnoise = 3", "balance.noise: is worked out, not given. Leave it out."),
    # what is wrong only together
    (
        '[air]\nhumidity = "45 %"\ndew_point = "9 °C"\nwet_bulb = "12 °C"',
        "air.wet_bulb: is given beside air.humidity and air.dew_point. Keep one measure of humidity.",
    ),
    (
        '[tare.air]\nhumidity = "45 %"\ndew_point = "9 °C"',
        "tare.air.dew_point: is given beside tare.air.humidity. Keep one measure of humidity.",
    ),
    *(
        (
            f'[{section}]\ntemperature = "9 °C"\n{key} = "20 °C"',
            f'{section}.{key}: the {label} "20 °C" is above {section}.temperature, "9 °C". '
            "Air cannot hold that much water: check which of the two it is.",
        )
        for section in ("air", "tare.air", "adjusted.air")
        for key, label in (("dew_point", "dew point"), ("wet_bulb", "wet-bulb temperature"))
    ),
    (
        '[air]\ntemperature = "22 °C"\ndew_point = "20 °C"\n[tare.air]\ntemperature = "9 °C"',
        'air.dew_point: the dew point "20 °C" is above tare.air.temperature, "9 °C".',
    ),
    (
        '[air]\ntemperature = "9 °C"\nhumidity = "40 %"\n[tare.air]\ndew_point = "20 °C"',
        'tare.air.dew_point: the dew point "20 °C" is above air.temperature, "9 °C".',
    ),
    (
        '[target]\nresolution = { value = "0.1 mg", u = "0.01 mg" }',
        "target.resolution: has a spread. What is demanded is one value.",
    ),
    ("[cycle]\nrepeats = 2.5", "cycle.repeats: is not a whole number. Write how many weighings are averaged."),
    ("[cycle]\nrepeats = { value = 3, u = 1 }", "cycle.repeats: is not a whole number."),
    # correlations
    (
        "correlation = 3",
        "correlation: needs two quantities and a coefficient. "
        'Write between = ["air.temperature", "air.humidity"], coefficient = -0.5.',
    ),
    ("[correlation]\nbetween = [1, 2, 3]\ncoefficient = 0.1", "correlation: needs two quantities and a coefficient."),
    ('[correlation]\nbetween = ["air.temperature", "air.humidity"]', "correlation: needs two quantities and a coeffi"),
    *(
        (
            AIR + correlation("air.temperature", "air.humidity", coefficient),
            f"correlation: the coefficient {read} is not from -1 to 1.",
        )
        for coefficient, read in (("1.01", '"1.01"'), ("nan", '"nan"'), ('"-0.5"', '"-0.5"'), ("true", '"true"'))
    ),
    (
        AIR + correlation("air.temprature", "air.humidity", 0.1),
        "air.temprature: is not known. Did you mean air.temperature?",
    ),
    (
        AIR + correlation("air.humidity", "air.humidity", 0.1),
        "correlation: air.humidity is named twice. Name two quantities.",
    ),
    (
        AIR + correlation("air.temperature", "air.humidity", 0.1) + correlation("air.humidity", "air.temperature", 0.2),
        "correlation: air.humidity and air.temperature are correlated twice. Keep one entry.",
    ),
    (
        AIR + correlation("air.temperature", "load.density", 0.1),
        "correlation: load.density is not given. Correlate quantities that have an entry.",
    ),
]


@pytest.mark.parametrize(("text", "message"), FAULTS)
def test_fault(faults, text, message):
    """One fault, with section and key, what was read and what would do."""
    found = faults(text)
    assert len(found) == 1
    assert found[0].startswith(message)


def test_three_that_cannot_go_together(faults):
    """Coefficients a, a and -a have the eigenvalues 1 + a, 1 + a and 1 - 2a, here -0.8 (the determinant by hand)."""
    text = AIR
    for first, second, sign in (
        ("air.temperature", "air.pressure", 1),
        ("air.temperature", "air.humidity", 1),
        ("air.pressure", "air.humidity", -1),
    ):
        text += correlation(first, second, sign * 0.9)
    assert faults(text) == [
        "correlation: the coefficients do not make a correlation matrix (smallest eigenvalue -0.8). "
        "Two quantities that both follow a third must follow each other; lessen a coefficient."
    ]


def test_every_fault_comes_in_one_message(read):
    text = """
    titel = "Bay 3"
    [air]
    temperature = "20 hPa"
    humidity = 1.4
    [load]
    mass = "5 g"
    density_kind = "bulk"
    [sensors]
    pressure = "1 hPa"
    [cycle]
    repeats = 1.5
    """
    with pytest.raises(InputError) as raised:
        read(text, require=("target.resolution", "load.mass"))
    assert [fault.where for fault in raised.value.faults] == [
        "titel",
        "air.temperature",
        "air.humidity",
        "load.density_kind",
        "sensors.air.pressure",
        "cycle.repeats",
        "target.resolution",
    ]
    first, *lines = str(raised.value).splitlines()
    assert first.endswith("station.toml: 7 things are wrong")
    assert lines == [f"  - {fault}" for fault in raised.value.faults]


# What is required ----------------------------------------------------------------------------------------------------


def test_what_is_required_is_asked_for():
    with pytest.raises(InputError) as raised:
        parse_setup({}, what="the set-up")
    assert [str(fault) for fault in raised.value.faults] == [
        'target.resolution: is not given. Write, for example, [target] resolution = "0.1 mg".',
        'load.mass: is not given. Write, for example, [load] mass = "5 g".',
    ]


def test_what_is_required_and_wrong_is_named_once(faults):
    text = '[target]\nresolution = "0.1 hPa"\n[load]\nmass = "5 g"'
    assert faults(text, require=("target.resolution", "load.mass")) == [
        'target.resolution: a mass is wanted, such as "0.1 mg"; "0.1 hPa" is a pressure.'
    ]


def test_nothing_is_required_where_nothing_is_asked_for():
    assert parse_setup({}, require=()).estimates == {}


# Changes from the command line ---------------------------------------------------------------------------------------

CHANGES = [
    ("air.temperature=21 °C", "air.temperature", Estimate(294.15)),
    (" air.temperature = 21 °C ", "air.temperature", Estimate(294.15)),
    ('air.temperature="21 °C"', "air.temperature", Estimate(294.15)),
    ("air.temperature='21 °C'", "air.temperature", Estimate(294.15)),
    ('air.temperature={ value = "21 °C", u = "0.1 K" }', "air.temperature", Estimate(294.15, "normal", 0.1)),
    ("air.temperature.value=21 °C", "air.temperature", Estimate(294.15, "normal", 0.3)),
    ("air.temperature.u=0.1 K", "air.temperature", Estimate(293.15, "normal", 0.1)),
    ("air.temperature.half_width=1 K", "air.temperature", Estimate(293.15, "rectangular", 1.0)),
    ("load.mass.u=1 mg", "load.mass", Estimate(5e-3, "normal", 1e-6)),
    ("load.density=1050 kg/m³", "load.density", Estimate(1050.0)),
    ("air.humidity=0.4", "air.humidity", Estimate(0.4)),
    ("tare.air.temperature=19 °C", "tare.air.temperature", Estimate(292.15)),
    ("sensors.pressure.u=1 hPa", "sensors.air.pressure", Estimate(0.0, "normal", 100.0)),
    ("cycle.temperature_change=0.3 K", "cycle.temperature_change", Estimate(0.0, "rectangular", 0.3)),
]


@pytest.mark.parametrize(("change", "name", "expected"), CHANGES)
def test_change(read, change, name, expected):
    before, after = read(BASE + AIR), read(BASE + AIR, changes=[change])
    assert after.estimates == {**before.estimates, name: expected}


def test_a_change_of_one_key_keeps_the_others(read):
    text = '[air]\npressure = { value = "1000 hPa", U = "1 hPa", k = 2 }\n'
    text += 'temperature = { value = "20 °C", half_width = "1 K", shape = "arcsine" }'
    changed = read(text, changes=["air.pressure.U=3 hPa", "air.temperature.half_width=2 K"]).estimates
    assert changed["air.pressure"] == Estimate(1e5, "normal", 150.0)
    assert changed["air.temperature"] == Estimate(293.15, "arcsine", 2.0)
    changed = read(text, changes=["air.pressure.u=3 hPa", "air.temperature.u=2 K"]).estimates
    assert changed["air.pressure"] == Estimate(1e5, "normal", 300.0)
    assert changed["air.temperature"] == Estimate(293.15, "normal", 2.0)


def test_a_later_change_counts(read):
    assert read(BASE, changes=["load.mass=6 g", "load.mass=7 g"]).estimates["load.mass"] == Estimate(7e-3)


def test_words_titles_waivers_and_correlations_change_too(read):
    changes = [
        *("load.insulating=true", 'adjusted.when="just before"', "load.density_kind=solid", "title=Bay 4"),
        'target.waived=["buoyancy"]',
        'correlation=[{ between = ["air.temperature", "air.humidity"], coefficient = 0.5 }]',
    ]
    setup = read(BASE + AIR, changes=changes)
    assert setup.choices == {"load.insulating": "yes", "adjusted.when": "just before", "load.density_kind": "solid"}
    assert (setup.title, setup.waived) == ("Bay 4", {"buoyancy"})
    assert setup.correlations == (Correlation("air.temperature", "air.humidity", 0.5),)


def test_the_mapping_itself_is_not_changed():
    mapping = {"air": {"temperature": {"value": "20 °C"}}}
    parse_setup(mapping, changes=["air.temperature.u=1 K", "air.humidity=0.4"], require=())
    assert mapping == {"air": {"temperature": {"value": "20 °C"}}}


@pytest.mark.parametrize(
    ("change", "message"),
    [
        ("air.temperature", '--set "air.temperature": has no value. Write --set air.temperature="20 °C".'),
        ("air.temperature=", '--set "air.temperature=": has no value.'),
        ("=3", '--set "=3": has no value.'),
        (
            "air.temperature={ value = 3",
            '--set air.temperature: "{ value = 3" is not a value of TOML. Check its quotes',
        ),
        ('air.temperature="21', '--set air.temperature: ""21" is not a value of TOML. Check its quotes and braces.'),
        ("air.temperature=" + "[" * 5000, '--set air.temperature: "['),
        ("load.mass.x=3", "--set load.mass.x: mass is no section. Check the name."),
        ("air.temprature=3 K", "air.temprature: is not known. Did you mean air.temperature?"),
        ("air=3", 'air: "3" is not a section.'),
        ("air.temperature=20 hPa", 'air.temperature: a temperature is wanted, such as "20.3 °C"; "20 hPa" is a press'),
        ("load" + ".density_kind" * 5000 + "=3", "is nested too deeply. Write each entry in its section"),
        ("load.density_kind={ a = 0x" + "f" * 5000 + " }", "holds an integer beyond 64 bits."),
    ],
)
def test_a_change_that_cannot_be_made(faults, change, message):
    found = faults(BASE, changes=[change])
    assert len(found) == 1
    assert found[0].startswith(message)


# What a file can be --------------------------------------------------------------------------------------------------


def refusal(path):
    with pytest.raises(InputError) as raised:
        read_setup(path)
    text = str(raised.value)
    assert text.startswith('"')
    assert path.name in text or len(str(path)) > 60
    return text


def test_a_file_that_is_not_there(tmp_path):
    assert refusal(tmp_path / "none.toml").endswith("is not there. Check the name and the folder.")
    assert refusal(tmp_path / "no folder" / "none.toml").endswith("is not there. Check the name and the folder.")


def test_a_folder(tmp_path):
    assert refusal(tmp_path).endswith("is a folder. Name the set-up file in it.")


def test_no_permission(tmp_path, monkeypatch):
    path = tmp_path / "station.toml"
    path.write_text(BASE, encoding="utf-8")

    def refuse(self):
        raise PermissionError(13, "Permission denied", str(self))

    monkeypatch.setattr(Path, "read_bytes", refuse)  # a test that runs as root may read everything
    assert refusal(path).endswith("may not be read. Check its permissions.")


def test_a_fault_of_the_disk(tmp_path, monkeypatch):
    path = tmp_path / "station.toml"
    path.write_text(BASE, encoding="utf-8")

    def fail(self):
        raise OSError(5, "Input/output error", str(self))

    monkeypatch.setattr(Path, "read_bytes", fail)
    assert refusal(path).endswith("cannot be read: Input/output error. Check the name.")


def test_names_that_no_file_can_have():
    with pytest.raises(InputError, match=r"cannot be read: its name cannot be used\. Check the name\."):
        read_setup("station\0.toml")
    with pytest.raises(InputError, match=r"cannot be read: File name too long\. Check the name\."):
        read_setup("x" * 5000)


@pytest.mark.parametrize(
    ("data", "message"),
    [
        (b"", "is empty. See the examples for what a set-up file holds."),
        (b" \n\t\n", "is empty."),
        (b"\xef\xbb\xbf", "is empty."),
        (b"x" * (LARGEST_FILE + 1), f"has {LARGEST_FILE + 1} bytes. A set-up file is text of a few kilobytes;"),
        (b"title = 'a\0b'", "is not text. A set-up file is TOML, plain text in UTF-8."),
        (BASE.encode("utf-16"), "is not text."),
        (b"\x89PNG\r\n\x1a\n\0\0\0\rIHDR", "is not text."),
        (b"[air]\ntemperature = '20 \xb0C'\n", "is not UTF-8 (line 2). Save it as UTF-8."),
        (b"\n\n\n\xff", "is not UTF-8 (line 4)."),
        (b"[air]\ntemperature = 20 \xc2\xb0C\n", "is not TOML: "),
        (b"[air]\n[air]\n", "is not TOML: Cannot declare"),
        (b"mass: 5 g\n", "is not TOML: "),
        (b"a = " + b"[" * 5000, "is nested too deeply. Write each entry in its section, as temperature in [air]."),
        (b"a = " + b"[" * 50 + b"]" * 50, "is nested too deeply."),
        (b"[load.density_kind" + b".a" * 5000 + b"]\nx = 1", "is nested too deeply."),
        (b"x = 1" + b"0" * 5000, 'holds an integer beyond 64 bits. Write a value as text with its unit, as "5 g".'),
        (b"[load]\ndensity_kind = 0x" + b"f" * 5000, "holds an integer beyond 64 bits."),
        (b"[air]\nco2 = { value = 9223372036854775808 }", "holds an integer beyond 64 bits."),  # 2^63
    ],
)
def test_a_file_that_is_no_set_up(tmp_path, data, message):
    path = tmp_path / "s.toml"
    path.write_bytes(data)
    with pytest.raises(InputError) as raised:
        read_setup(path)
    assert message in str(raised.value)
    assert len(raised.value.faults) == 1


def test_a_fault_of_toml_says_where(tmp_path):
    path = tmp_path / "s.toml"
    path.write_text('[air]\ntemperature = "20 °C"\nhumidity = 45 %\n', encoding="utf-8")
    with pytest.raises(InputError) as raised:
        read_setup(path)
    assert "at line 3, column" in str(raised.value)
    assert str(raised.value).endswith('Texts stand in quotes, as in temperature = "20 °C"; sections as [air].')


def test_a_byte_order_mark_and_foreign_line_ends_are_accepted(tmp_path):
    path = tmp_path / "s.toml"
    path.write_bytes(b"\xef\xbb\xbf" + BASE.replace("\n", "\r\n").encode())
    assert (
        read_setup(path).estimates
        == parse_setup({"target": {"resolution": "0.1 mg"}, "load": {"mass": "5 g"}}).estimates
    )
