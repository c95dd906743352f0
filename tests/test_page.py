"""The pages without a browser: what is typed, what is understood, and what stays apart."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest
from streamlit.testing.v1 import AppTest

from envcorr.intake.set_up_text import entries_of
from envcorr.intake.setup_file import read_setup
from envcorr.jobs.room import check_room
from envcorr.page.form import from_link, link, names_to_add
from envcorr.page.room import sizes

STATION = "Powder station, bay 3 (invented)"
EXAMPLE = Path("envcorr/examples/powder_station.toml")


def room_page():
    from envcorr.page.room import draw

    draw()


def mass_page():
    from envcorr.page.others import mass

    mass()


def level_page():
    from envcorr.page.others import level

    level()


def air_page():
    from envcorr.page.others import air

    air()


def run(page, **query):
    test = AppTest.from_function(page, default_timeout=30)
    for name, value in query.items():
        test.query_params[name] = value
    return test.run()


def seen(test):
    """Everything that a person reads on the page."""
    assert not test.exception
    return " ".join(part.proto.body for part in test.get("html"))


def field(test, name, page="room"):
    return test.text_input(key=f"{page}|{name}")


def station():
    test = run(room_page)
    test.selectbox(key="begin room").set_value(STATION).run()
    return test


def test_from_an_example_to_a_verdict():
    text = seen(station())
    assert "reached once treated" in text.lower()
    assert text.index("What spoils it") < text.index("What each effect does")  # the chart first
    for part in ("Not assessed", "Assumed, because nothing was said", "understood as 20.5 °C to 22.5 °C"):
        assert part in text


def test_an_error_stands_beside_its_field_in_the_words_of_the_command_line():
    test = station()
    field(test, "air.temperature").set_value("20 kg").run()
    text = seen(test)
    assert "a temperature is wanted" in text
    assert "not computed yet" in text
    field(test, "air.temperature").set_value("21,3 °C").run()  # a decimal comma
    assert "understood as 21.3 °C, exact" in seen(test)


def test_what_if():
    """Another mass by the slider changes the figures; back to the set-up takes the slider away."""
    test = station()
    test.selectbox(key="what if first").set_value("load.mass").run()
    slider = next(one for one in test.slider if "load.mass" in one.key)
    before = seen(test)
    slider.set_value(slider.max).run()
    after = seen(test)
    assert before != after
    test.button(key="reset").click().run()
    assert not list(test.slider)


def test_two_users_never_see_each_other():
    first, second = station(), run(room_page)
    assert "Powder station" in seen(first)
    assert "Powder station" not in seen(second)
    assert field(second, "load.mass").value == ""


def test_hostile_text_stays_text():
    test = station()
    test.text_input(key="room|title").set_value("<script>alert(1)</script>").run()
    text = seen(test)
    assert "<script" not in text
    assert "&lt;script&gt;" in text


def test_a_link_holds_the_set_up():
    entries = entries_of(tomllib.loads(EXAMPLE.read_text(encoding="utf-8")))
    assert from_link(link(entries)) == entries
    test = run(room_page, s=link(entries))
    assert "reached once treated" in seen(test).lower()
    for damaged in ("abc", "%%%", link(entries)[:-20], "A" * 9000):
        assert from_link(damaged) == {}
    assert "no set-up that can be read" in seen(run(room_page, s="abc"))


def test_a_new_quantity_is_offered_by_itself():
    """The form is made from the vocabulary: everything that may be given can be added."""
    from envcorr.catalogue import CATALOGUE

    given = {q.name for q in CATALOGUE.quantities.values() if not q.internal} | set(CATALOGUE.choices)
    assert set(names_to_add({})) == given
    test = run(room_page)
    test.selectbox(key="add room").set_value("draught.speed").run()
    assert field(test, "draught.speed").value == ""


def test_the_largest_contribution_comes_first():
    result = check_room(read_setup(EXAMPLE), draws=2**14)
    table = sizes(result)[1]
    lengths = [row[2] for row in table.groups[0].rows]
    assert lengths == sorted(lengths, reverse=True)
    assert lengths[0] == 1.0
    assert table.groups[0].rows[0][0] == "Static charge"


def test_a_mass():
    test = run(mass_page)
    for name, text in (
        ("reading", "1.25 g"),
        ("load.density", "1050 kg/m³"),
        ("air.temperature", "21.4 °C"),
        ("air.pressure", "943.1 hPa"),
        ("air.humidity", "42 %"),
    ):
        field(test, name, "mass").set_value(text).run()
    assert "1.25115" in seen(test)  # +1.15 mg, as on the command line


def test_air():
    test = run(air_page)
    for name, text in (("air.temperature", "20 °C"), ("air.pressure", "101325 Pa"), ("air.humidity", "50 %")):
        field(test, name, "air").set_value(text).run()
    field(test, "air.co2", "air").set_value("400 ppm").run()
    assert "1.1993" in seen(test)  # CIPM-2007 (Picard et al. 2008)


def test_level():
    test = run(level_page)
    assert "not level enough" in seen(test).lower()
    test.text_input(key="level vial").set_value("0.3").run()
    assert "per graduation" in seen(test)
    test.text_input(key="level vial").set_value("radius 1 m").run()
    assert "not level enough" in seen(test).lower()


@pytest.mark.parametrize("page", [room_page, mass_page, level_page, air_page])
def test_every_page_begins_without_a_fault(page):
    seen(run(page))
