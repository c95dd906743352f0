"""Reports to file: what they hold, that they are safe, tagged, and the same bytes again."""

from __future__ import annotations

import re
from html.parser import HTMLParser

import pytest
from click.testing import CliRunner
from pypdf import PdfReader

from envcorr.cli import cli
from envcorr.document.blocks import Column, Drawing, Figure, Figures, Group, Heading, Table, Text, Verdict
from envcorr.render import html, pdf, terminal

SETUP = """
title = "Bay 3 <b>& co</b> #set text(red)"
[target]
resolution = "1 mg"
[load]
mass = "5 g"
density = "1050 kg/m³"
[air]
temperature = "21 °C"
pressure = "990 hPa"
humidity = { value = "45 %", u = "3 %" }
[sensors]
temperature = { u = "0.2 K" }
[balance]
scale_interval = "0.1 mg"
repeatability = "0.1 mg"
sensitivity_temperature_coefficient = "2 ppm/K"
"""
COMMANDS = {
    "room": ["room", "{setup}"],
    "limits": ["limits", "{setup}"],
    "mass": ["mass", "--setup={setup}", "--reading=5.0000 g"],
}


@pytest.fixture(params=COMMANDS)
def command(request, tmp_path):
    (tmp_path / "bay.toml").write_text(SETUP, encoding="utf-8")
    return [part.format(setup=tmp_path / "bay.toml") for part in COMMANDS[request.param]]


def report(command, path, *more, code=0):
    done = CliRunner().invoke(cli, [*command, f"--report={path}", *more])
    assert done.exit_code == code, done.output
    return path.read_bytes() if path.exists() else b""


class Tags(HTMLParser):
    def __init__(self, text):
        super().__init__()
        self.found, self.text = [], ""
        self.feed(text)

    def handle_starttag(self, tag, attrs):
        self.found.append((tag, dict(attrs)))

    def handle_data(self, data):
        self.text += data


def words(text):
    return " ".join(text.split())


def test_html(command, tmp_path):
    text = report(command, tmp_path / "a.html").decode()
    tags = Tags(text)
    assert {"Bay 3 <b>& co</b> #set text(red)", "SHA-256 of what was given"} <= {
        part for part in ("Bay 3 <b>& co</b> #set text(red)", "SHA-256 of what was given") if part in tags.text
    }
    assert not any(tag in ("script", "b", "link", "img") for tag, _ in tags.found)
    assert not any(name in attributes for _, attributes in tags.found for name in ("src", "href", "onclick"))
    assert [tag for tag, _ in tags.found if tag == "h1"] == ["h1"]
    for said in ("What was given, and how it was understood", "Methods and references", "Notices accepted by"):
        assert said in tags.text
    assert "0.2 K" in words(tags.text)
    assert "-273" not in tags.text.replace("−", "-")  # the error of a sensor is a difference
    assert report(command, tmp_path / "b.html").decode() == text


def test_pdf(command, tmp_path):
    data = report(command, tmp_path / "a.pdf")
    assert report(command, tmp_path / "b.pdf") == data
    reader = PdfReader(tmp_path / "a.pdf")
    root = reader.trailer["/Root"]
    assert root["/MarkInfo"]["/Marked"]
    assert root["/Lang"].startswith("en")
    assert "/StructTreeRoot" in root
    assert b"pdfuaid:part" in root["/Metadata"].get_data()  # PDF/UA-1, ISO 14289-1, clause 5
    assert reader.metadata.title == "Bay 3 <b>& co</b> #set text(red)"
    text = words(" ".join(page.extract_text() for page in reader.pages))
    for said in ("Bay 3 <b>& co</b> #set text(red)", "Methods and references", "SHA-256", "Notices accepted by"):
        assert said in text
    assert len(reader.pages) <= 3


def test_a_level_has_its_report_too(tmp_path):
    """Inputs as typed, methods, and room to sign; a hostile name of a foot stays text."""
    feet = ["--foot=<b>#x</b>=0 mm, 0 mm", "--foot=b=100 mm, 0 mm", "--foot=c=0 mm, 100 mm"]
    command = ["level", "--load=200 g", "--allowed=0.05 mg", "--tilt=1 arcmin right", *feet]
    tags = Tags(report(command, tmp_path / "a.html").decode())
    for said in (
        "<b>#x</b>",
        "--load",
        "200 g",
        "Methods and references",
        "JCGM 106",
        "Notices accepted by",
        "SHA-256",
    ):
        assert said in tags.text
    assert not any(tag == "b" for tag, _ in tags.found)
    assert report(command, tmp_path / "b.html") == (tmp_path / "a.html").read_bytes()
    report(command, tmp_path / "a.pdf")
    reader = PdfReader(tmp_path / "a.pdf")
    assert reader.trailer["/Root"]["/MarkInfo"]["/Marked"]
    assert len(reader.pages) <= 2


def test_a_short_report_has_two_pages(tmp_path):
    reading = ["mass", "--reading=5.0000 g", "--density=1050 kg/m³", "--temperature=21 °C"]
    report([*reading, "--pressure=990 hPa", "--humidity=45 %"], tmp_path / "a.pdf")
    assert len(PdfReader(tmp_path / "a.pdf").pages) <= 2


def test_the_digest_is_that_of_what_was_given(tmp_path):
    (tmp_path / "bay.toml").write_text(SETUP, encoding="utf-8")
    command = ["room", str(tmp_path / "bay.toml")]
    found = re.compile(r"SHA-256 of what was given: ([0-9a-f]{64})")
    first, same, other = (
        found.search(report(command, tmp_path / f"{name}.html", *more).decode())[1]
        for name, more in (("a", ()), ("b", ("--seed=1",)), ("c", ("--set=air.temperature=22 °C",)))
    )
    assert first == same != other


def test_what_cannot_be_written(tmp_path):
    (tmp_path / "bay.toml").write_text(SETUP, encoding="utf-8")
    command = ["room", str(tmp_path / "bay.toml")]
    report(command, tmp_path / "a.doc", code=2)
    report(command, tmp_path / "no" / "a.pdf", code=2)
    (tmp_path / "a.pdf").write_bytes(b"mine")
    assert report(command, tmp_path / "a.pdf", code=2) == b"mine"
    assert report(command, tmp_path / "a.pdf", "--force")[:5] == b"%PDF-"


def test_every_block_in_every_format():
    svg = '<svg xmlns="http://www.w3.org/2000/svg" width="40" height="20"><rect width="40" height="20"/></svg>'
    blocks = [
        Heading("Title", level=1),
        Verdict("fails", "bad", ("A sentence.",)),
        Text("Quietly.", quiet=True),
        Figures((Figure("Mass", "1 g", "k = 2"),)),
        Table((Column("a"), Column("n", "right"), Column("", "bar")), (Group((("x", "1", 0.5), ("y", "2", -0.3))),)),
        Drawing(svg, "A black rectangle."),
    ]
    page = html.render(blocks)
    assert svg in page
    assert 'aria-label="A black rectangle."' in page
    assert "width:50.0%" in page
    assert "bar takes" in page
    assert pdf.render(blocks)[:5] == b"%PDF-"
    assert "A black rectangle." in terminal.render(blocks)
