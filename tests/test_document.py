"""Documents and their rendering: the right words for a result, and text that any terminal can show."""

import dataclasses
import functools
import json
import math

import pytest

from envcorr.catalogue import CATALOGUE, Catalogue
from envcorr.choices import CHOICES
from envcorr.derived import QUANTITIES as DERIVED
from envcorr.derived import WAYS
from envcorr.document import air as air_page
from envcorr.document import blocks, explain, wording
from envcorr.document import room as room_page
from envcorr.effect import Answer, Effect
from envcorr.effects import EFFECTS
from envcorr.errors import InputError, Notice
from envcorr.estimate import Estimate
from envcorr.intake.setup_file import parse_setup
from envcorr.jobs import room as room_job
from envcorr.jobs.air import air_density
from envcorr.model import make_plan
from envcorr.render import json as as_json
from envcorr.render import json_explain
from envcorr.render.terminal import render
from envcorr.vocabulary import QUANTITIES, TARGET, Quantity

# an invented room in which everything has a spread
SETUP = {
    "title": "Invented",
    "target": {"resolution": "0.1 mg"},
    "air": {
        "temperature": {"low": "20 °C", "high": "23 °C"},
        "pressure": {"value": "1008 hPa", "half_width": "20 hPa", "shape": "arcsine"},
        "humidity": {"value": "45 %", "u": "3 %"},
    },
    "sensors": {"pressure": {"u": "0.5 hPa"}, "temperature": {"u": "0.2 K"}},
    "load": {"mass": "5 g", "density": {"value": "1050 kg/m³", "U": "10 kg/m³", "k": 2, "dof": 9}},
    "balance": {
        "repeatability": "20 µg",
        "scale_interval": "10 µg",
        "nonlinearity": "30 µg",
        "sensitivity_temperature_coefficient": "1 ppm/K",
    },
    "adjusted": {"when": "just before"},
}
DRAWS = 16384


@pytest.fixture(scope="module")
def result():
    return room_job.check_room(parse_setup(SETUP), draws=DRAWS)


def said(page, kind):
    return [block for block in page if isinstance(block, kind)]


def text(page, width=100):
    return " ".join(render(page, width=width).split())


# wording -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("value", "words"),
    [
        (0.0, "0 %"),
        (0.0004, "under 0.1 %"),
        (0.5, "50.0 %"),
        (0.9731, "97.3 %"),
        (0.99996, "over 99.9 %"),
        (1.0, "100 %"),
    ],
)
def test_a_probability_is_never_rounded_to_certainty(value, words):
    assert wording.percent(value) == words


@pytest.mark.parametrize(
    ("value", "words"),
    [(0.0, "0 %"), (0.004, "≈0 %"), (-0.004, "≈0 %"), (0.756, "76 %"), (-0.12, "−12 %"), (1.0, "100 %")],
)
def test_a_share(value, words):
    assert wording.share(value) == words


@pytest.mark.parametrize(
    ("words", "phrase"), [([], ""), (["a"], "a"), (["a", "b"], "a and b"), (["a", "b", "c"], "a, b and c")]
)
def test_a_list_of_words(words, phrase):
    assert wording.joined(words) == phrase


@pytest.mark.parametrize(
    ("estimate", "kind", "words"),
    [
        (Estimate(294.55), "temperature", "21.4 °C, exact"),
        (Estimate(294.55, "normal", 0.2), "temperature", "21.4 °C, u 0.2 K"),
        (Estimate(1050.0, "normal", 5.0, 9), "density", "1050 kg/m³, u 5 kg/m³, 9 degrees of freedom"),
        (Estimate(100800.0, "rectangular", 300.0), "pressure", "1005 hPa to 1011 hPa"),
        (Estimate(100800.0, "arcsine", 300.0), "pressure", "1005 hPa to 1011 hPa, cycling"),
        (Estimate(100800.0, "triangular", 300.0), "pressure", "1005 hPa to 1011 hPa, triangular"),
        (Estimate(0.0, "rectangular", 3.0), "temperature difference", "±3 K"),
        (Estimate(0.0, "normal", 50.0), "pressure", "±0.5 hPa (u)"),
        (Estimate.between(1e-7, 1e-5, "log-uniform"), "surface charge", "0.1 µC/m² to 10 µC/m², log-uniform"),
    ],
)
def test_an_estimate_in_words(estimate, kind, words):
    assert wording.estimate_text(estimate, kind) == words


@pytest.mark.parametrize(
    ("resolution", "totals", "value", "shown"),
    [
        (1e-7, [4.5e-5], -4.479e-5, "−44.790 mg"),  # 0.1 mg: decimals for a hundredth of it
        (1e-7, [2e-8], -4.479e-5, "−44.7900 mg"),  # a total of 20 µg wants another one
        (1e-8, [3e-8], 1.234e-8, "+12.3 µg"),
        (1e-3, [1e-3], 0.5e-3, "+0.50 g"),
        (1e-7, [1e-7], 0.0, "0 mg"),
        (1e-7, [1e-7], 1e-12, "≈0 mg"),  # never a bare zero for what is not
    ],
)
def test_masses_under_each_other_share_unit_and_decimals(resolution, totals, value, shown):
    assert wording.MassScale.fitting(resolution, totals).with_unit(value, signed=True) == shown


def test_notices_come_with_warnings_first_and_with_their_share():
    found = wording.notices(
        [Notice("a", "First.", level="info"), Notice("b", "Second.", "a source", share=0.25)], ["Third.", "Third."]
    )
    notes = said(found, blocks.Notices)[0].notes
    assert [(note.level, note.sentence) for note in notes] == [
        ("warning", "Second. (In 25.0 % of the draws.)"),
        ("info", "First."),
        ("caution", "Third."),
    ]
    assert notes[0].source == "a source"
    assert wording.notices([]) == []


# the page of a room check -------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("answer", "tone"),
    [
        ("reached", "good"),
        ("reached once corrected", "good"),
        ("reached once treated", "caution"),
        ("undecided", "open"),
        ("not reached", "bad"),
    ],
)
def test_every_answer_has_its_tone_and_the_decision_rule(result, answer, tone):
    changed = dataclasses.replace(result, verdict=dataclasses.replace(result.verdict, answer=answer))
    page = room_page.document(changed)
    verdict = said(page, blocks.Verdict)[0]
    assert (verdict.answer.lower(), verdict.tone) == (answer, tone)
    rule = " ".join(verdict.sentences)
    assert "±0.05 mg (50 % of the target)" in rule
    assert "±0.1 mg" in rule
    assert "must reach 95 %" in rule
    assert wording.percent(result.total(result.verdict.state).whole.conformance_probability) in rule


def test_effects_are_ranked_by_what_is_left_without_them(result):
    page = room_page.document(result)
    table = next(table for table in said(page, blocks.Table) if table.columns[0].title == "Effect")
    assert [column.align for column in table.columns] == ["left", "right", "right", "right", "right", "bar"]
    titles = [row[0] for group in table.groups for row in group.rows]
    by_title = {wording.capital(row.title): row for row in result.effects}
    for group in table.groups:
        left = [by_title[row[0]].e95_without for row in group.rows if row[0] in by_title]
        assert left == sorted(left)
    assert set(by_title) <= set(titles)
    assert {by_title[row[0]].own for row in table.groups[-1].rows} == {True}


def test_the_correction_has_the_sign_that_is_to_be_added(result):
    found = next(row for row in result.effects if row.correction)
    words = text(room_page.document(result))
    sign = "+" if found.correction > 0 else "−"
    assert f"add {sign}{abs(found.correction) * 1e6:.3f} mg to the reading" in words


def test_several_corrections_are_added_up(result):
    first, second, *rest = result.effects
    rows = (
        dataclasses.replace(first, correction=2e-6),
        dataclasses.replace(second, correction=-0.5e-6),
        *(dataclasses.replace(row, correction=None) for row in rest),
    )
    words = text(room_page.document(dataclasses.replace(result, effects=rows)))
    assert "Together add +1.500 mg" in words


def test_sensors_stand_apart_from_what_the_room_does(result):
    page = room_page.document(result)
    table = next(table for table in said(page, blocks.Table) if table.columns[0].title == "Quantity")
    sensors = next(group for group in table.groups if "sensors" in group.title)
    labels = [str(row[0]) for row in sensors.rows]
    assert labels
    assert all("as the sensor reads it" in label for label in labels)
    others = [str(row[0]) for group in table.groups if group is not sensors for row in group.rows]
    assert not any("sensor" in label for label in others)


def test_what_first_order_does_not_see_is_named(result):
    name, title = result.effects[0].name, result.effects[0].title
    blind = dataclasses.replace(result.first_order, agrees=False, blind_to=(name,))
    words = text(room_page.document(dataclasses.replace(result, first_order=blind)))
    assert f"First order does not see {title}: at the nominal values the slope is zero" in words
    assert "they disagree, and the Monte Carlo figures count" in words


def test_a_share_of_the_interaction_is_a_row_of_its_own(result):
    shown = dataclasses.replace(result, interaction=-2e-7, interaction_share={"surroundings": -0.1, "whole": -0.1})
    assert "Interaction of the effects −0.200 −10 %" in text(room_page.document(shown))


def test_as_read_names_its_total():
    found = room_job.check_room(parse_setup(SETUP), draws=DRAWS, as_read=True)
    words = text(room_page.document(found))
    assert "surroundings as read" in words
    assert "corrected surroundings" not in words


def test_a_difference_and_a_probability_of_their_own():
    target = {"resolution": "0.1 mg", "measurand": "difference", "probability": "90 %"}
    found = room_job.check_room(parse_setup({**SETUP, "target": target, "cycle": {"repeats": 3}}), draws=DRAWS)
    words = text(room_page.document(found))
    assert "the difference between two net weighings" in words
    assert "the mean of 3 weighings" in words
    assert "must reach 90 %" in words
    assert "e90 without" in words


# the other pages -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("u", "density", "shown"),
    [("0.0123", "1.2000", "0.0123"), ("0.00246", "1.2000", "0.0025"), ("0.0000246", "1.200000", "0.000025")],
)
def test_the_air_page_shows_two_digits_of_u(u, density, shown):
    air = {"density": {"value": "1.2 kg/m³", "u": f"{u} kg/m³"}}
    page = text(air_page.document(air_density(parse_setup({"air": air}, require=()))))
    assert f"Air density {density} kg/m³ Standard uncertainty u {shown} kg/m³" in page


def test_degrees_of_freedom_are_told():
    air = {**SETUP["air"], "pressure": {"value": "1008 hPa", "u": "2 hPa", "dof": 4}}
    found = air_density(parse_setup({"air": air}, require=()))
    assert f"{found.budget.dof:.3g} effective degrees of freedom" in text(air_page.document(found))


def test_explain_offers_the_nearest_name():
    with pytest.raises(InputError, match=r"Did you mean air\.pressure"):
        explain.look_up("air.presure")
    with pytest.raises(InputError, match=r"Did you mean load\.mass"):
        explain.look_up("mass")
    assert explain.look_up("eccentric-loading") is CATALOGUE.effects["eccentric_loading"]


def test_examples_of_quantities_are_accepted_by_them():
    from envcorr.intake.entry import read_estimate

    for quantity in CATALOGUE.quantities.values():
        if not quantity.internal:
            read_estimate(explain.example(quantity), quantity)


def test_a_quantity_knows_the_effects_that_it_enters():
    # both effects rest on the air temperature by their signatures or their ways
    assert "buoyancy" in explain.used_by(CATALOGUE.quantities["air.dew_point"])
    assert explain.used_by(CATALOGUE.quantities["balance.nonlinearity"]) == ("nonlinearity",)


# a new effect appears by itself -------------------------------------------------------------------------------


def pull(bench_magnet_pull):
    """Return the pull of the magnet [kg]."""
    return bench_magnet_pull


MAGNET = Effect(
    name="magnet",
    title="magnet under the pan",
    help="A magnet pulls at a steel load.",
    source="made up for this test",
    load=pull,
    quantities=(Quantity("bench.magnet_pull", "mass", "pull of the magnet", "With the load lifted off.", limit=True),),
    answers=(Answer("twice the pull", "mass", lambda load_mass: 2 * load_mass),),
    treatment="take the magnet away",
    leaves="nothing",
    test="Turn the load upside down.",
    caution="Strong magnets and implants do not go together.",
)
WITH_MAGNET = Catalogue.build([*QUANTITIES, *TARGET, *DERIVED], CHOICES, WAYS, [*EFFECTS, MAGNET])


def test_a_new_effect_is_in_every_output(monkeypatch):
    monkeypatch.setattr(room_job, "make_plan", functools.partial(make_plan, catalogue=WITH_MAGNET))
    setup = parse_setup(SETUP)
    lacking = room_job.check_room(setup, draws=DRAWS)
    assert "Magnet under the pan lacks bench.magnet_pull." in text(room_page.document(lacking))

    given = {**setup.estimates, "bench.magnet_pull": Estimate(0.0, "rectangular", 5e-7)}
    found = room_job.check_room(dataclasses.replace(setup, estimates=given), draws=DRAWS)
    words = text(room_page.document(found))
    for sentence in (
        "First to improve Magnet under the pan",
        "To remove it: take the magnet away; what is left then: nothing.",
        "To see it: turn the load upside down.",
        "Twice the pull: 10 g.",
        "Caution: Strong magnets and implants do not go together.",
    ):
        assert sentence in words
    document = as_json.room(found)
    effect = next(effect for effect in document["result"]["effects"] if effect["name"] == "magnet")
    assert effect["u"]["value"] == pytest.approx(0.5 / math.sqrt(3), rel=1e-3)  # rectangular: JCGM 101:2008, 6.4.2
    assert effect["answers"] == [{"label": "twice the pull", "value": pytest.approx(1e4), "unit": "mg"}]

    page = text(explain.document(MAGNET, WITH_MAGNET))
    assert "Adds to the load The pull of the magnet [kg]." in page
    assert "bench.magnet_pull" in page
    assert json_explain.explain(MAGNET, WITH_MAGNET)["result"]["asks_for"] == ["bench.magnet_pull"]
    assert "magnet" in text(explain.overview(WITH_MAGNET))


# rendering -------------------------------------------------------------------------------------------------------

LONG = "a sentence that goes on and on, with a word like Blockierungsverhinderungsvorrichtungsbeauftragter in it. " * 3
PAGE = [
    blocks.Heading("天秤 [bold]not markup[/bold]", level=1),
    blocks.Verdict("Reached", "good", (LONG,)),
    blocks.Heading("Second"),
    blocks.Text(LONG),
    blocks.Figures((blocks.Figure("Label", "1.2 kg/m³", LONG), blocks.Figure("Other", "±3 µg"))),
    blocks.Table(
        (blocks.Column("Name"), blocks.Column("u", "right"), blocks.Column("", "bar")),
        (
            blocks.Group((("one", "−1.25", 1.0), ("two", "0.75", 0.33)), "Group"),
            blocks.Group(((LONG, "", -0.5), ("none", "–", None))),
        ),
        LONG,
    ),
    blocks.Listing((blocks.Item("a term of some length that has to wrap somewhere", LONG),)),
    blocks.Notices((blocks.Note(LONG, "source", "warning"), blocks.Note("Mind.", level="caution"))),
    blocks.Text("end", quiet=True),
]


@pytest.mark.parametrize("encoding", ["utf-8", "ascii", "latin-1"])
@pytest.mark.parametrize("width", [60, 80, 120])
def test_every_block_stays_within_the_width(width, encoding):
    from rich.cells import cell_len

    page = render(PAGE, width=width, encoding=encoding)
    assert max(map(cell_len, page.splitlines())) <= width
    page.encode(encoding)
    assert "\x1b" not in page
    for words in ("[bold]not markup[/bold]", "REACHED", "Warning: a sentence", "Caution: Mind.", "Group", "end"):
        assert words in page


def test_bars_are_as_long_as_their_share():
    page = render(PAGE, width=80)
    assert "█" * 8 in page
    assert "█" * 9 not in page
    one_third = next(line for line in page.splitlines() if "two" in line)
    assert one_third.endswith("██▋")  # 0.33 of 8 columns, to an eighth
    assert "░" * 4 in page  # half of them, negative
    wide = render(PAGE, width=120)
    assert "█" * 20 in wide
    plain = render(PAGE, width=80, encoding="ascii")
    assert "#" * 8 in plain
    assert "----" in plain


def test_signs_that_the_encoding_lacks_are_said_in_others():
    page = render([blocks.Text("20 °C ± 0.1 K, 3 µg, 1050 kg/m³, −5 × 10⁻⁶, 5 m², ≈0 – ∞, 日")], encoding="ascii")
    assert page.strip() == "20 degC +- 0.1 K, 3 ug, 1050 kg/m3, -5 x 10^-6, 5 m2, ~0 - infinity, ?"


def test_control_characters_do_not_reach_the_terminal():
    page = render([blocks.Heading("a\x1b[31mb\x07c\x9b", level=1), blocks.Text("d\re\nf")], colour=True)
    assert "\x1b[31m" not in page
    assert "\x07" not in page
    assert "\r" not in page
    assert "\x9b" not in page


def test_an_unknown_encoding_is_taken_as_ascii():
    assert render([blocks.Text("3 µg")], encoding="no such encoding").strip() == "3 ug"


def test_colour_only_where_asked_for():
    assert "\x1b[1;32m" in render(PAGE, colour=True)
    assert "\x1b" not in render(PAGE, colour=False)


@pytest.mark.parametrize(
    ("tty", "environment", "coloured"),
    [
        (True, {"TERM": "xterm"}, True),
        (False, {"TERM": "xterm"}, False),
        (True, {"TERM": "xterm", "NO_COLOR": "1"}, False),
        (True, {"TERM": "dumb"}, False),
    ],
)
def test_colour_follows_the_terminal(monkeypatch, tty, environment, coloured):
    import io

    from envcorr.render.terminal import render_for

    class Stream(io.TextIOWrapper):
        def isatty(self):
            return tty

    monkeypatch.delenv("NO_COLOR", raising=False)
    for name, value in environment.items():
        monkeypatch.setenv(name, value)
    page = render_for(PAGE, Stream(io.BytesIO(), encoding="utf-8"))
    assert ("\x1b[" in page) is coloured


# JSON ------------------------------------------------------------------------------------------------------------


def test_json_knows_no_nan_and_no_infinity():
    document = {"a": math.nan, "b": [math.inf, 1.5], "c": {"d": -math.inf}, "e": (True, None, "x")}
    assert json.loads(as_json.dumps(document)) == {
        "a": None,
        "b": [None, 1.5],
        "c": {"d": None},
        "e": [True, None, "x"],
    }


def test_a_figure_is_in_one_unit():
    found = as_json.figure(294.55, "temperature", u=0.2, coverage_interval=(294.15, 294.95), k=2.0)
    assert found["value"] == pytest.approx(21.4)
    assert found["unit"] == "°C"
    assert found["u"] == pytest.approx(0.2)  # a difference: the zero of °C plays no part
    assert found["coverage_interval"] == pytest.approx([21.0, 21.8])
    assert found["k"] == 2.0


def test_an_estimate_in_json():
    found = as_json.estimate(Estimate(100800.0, "rectangular", 300.0), "pressure")
    assert found["u"] == pytest.approx(3 / math.sqrt(3))  # JCGM 101:2008, 6.4.2
    assert found["bounds"] == pytest.approx([1005.0, 1011.0])
    assert found["distribution"] == "rectangular"
    assert as_json.estimate(Estimate(0.0, "normal", 0.2, 9.0), "temperature", sensor=True) == {
        "value": 0.0,
        "unit": "K",
        "u": pytest.approx(0.2),
        "distribution": "normal",
        "dof": 9.0,
    }


def test_every_number_of_a_room_check_is_finite_or_null(result):
    def refuse(word):
        raise AssertionError(word)

    document = as_json.room(result)
    again = json.loads(as_json.dumps(document), parse_constant=refuse)
    assert again["result"]["corrected"]["whole"]["u"]["value"] == pytest.approx(
        result.corrected.whole.summary.u * 1e6, rel=1e-12
    )
    assert again["result"]["first_order"]["error"]["k"] == result.first_order.budget.k
    assert again["inputs"]["load.density"]["dof"] == 9.0
