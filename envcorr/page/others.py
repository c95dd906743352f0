"""The pages of the analyst, the technician, and of the air."""

from __future__ import annotations

import tempfile
from concurrent.futures import ThreadPoolExecutor, wait
from pathlib import Path

from envcorr.document import air as air_page
from envcorr.document import level as level_page
from envcorr.document import mass as mass_page
from envcorr.document import mass_table as table_page
from envcorr.document.blocks import Figures, Verdict
from envcorr.errors import Fault, InputError, NotComputedError
from envcorr.page import show
from envcorr.page.form import Form
from envcorr.page.start import begin, hand_out, reports

__all__ = ["air", "level", "mass"]

MASS = Form(
    "mass",
    (
        "reading",
        "load.density",
        "load.density_kind",
        "air.temperature",
        "air.pressure",
        "air.humidity",
        "adjusted.when",
    ),
)
AIR = Form("air", ("air.temperature", "air.pressure", "air.humidity", "air.co2", "air.altitude"))
MOST_ROWS = 200_000
"""Rows of a table on the page; the command line takes any number."""


def mass() -> None:
    """Draw the analyst's page: one reading, or a table of them."""
    import streamlit as st

    st.title("What is its true mass?")
    begin(MASS)
    left, right = st.columns([2, 3], gap="large")
    setup, error = MASS.read()
    with left:
        MASS.draw(error, setup)
        hand_out(MASS)
    with right:
        one, several = st.tabs(["One reading", "A table"])
        with one:
            _one_reading(setup)
        with several:
            _table(setup)


def _one_reading(setup: object) -> None:
    import streamlit as st

    from envcorr.jobs.mass import find_mass
    from envcorr.setup import Setup

    if not isinstance(setup, Setup):
        show.line("Mend what is marked beside the fields.", "bad")
        return
    try:
        result = find_mass(setup)
    except (InputError, NotComputedError) as error:
        show.line(str(error), "bad")
        return
    document = mass_page.document(result)
    show.blocks(document)
    reports("mass", document, result.plan)
    with st.bottom:
        show.blocks([Figures(next(block for block in document if isinstance(block, Figures)).figures[:2])])


def _table(setup: object) -> None:
    import streamlit as st

    from envcorr.jobs.mass_file import convert
    from envcorr.setup import Setup

    show.line(
        'A column is understood by its header, such as "reading [g]" or "load.density [kg/m³]"; what is in no column '
        "comes from the fields.",
        "quiet",
    )
    upload = st.file_uploader("A table of readings", type=["csv", "tsv", "xlsx", "parquet"], key="table")
    if upload is None or not st.button("Compute the masses", key="compute table"):
        return
    suffix = Path(upload.name).suffix.lower()
    with tempfile.TemporaryDirectory() as folder, st.status("Masses of the table", expanded=True) as status:
        source, target = Path(folder) / f"readings{suffix}", Path(folder) / f"masses{suffix}"
        source.write_bytes(upload.getvalue())
        bar = st.progress(0.0)
        done: list[float] = [0.0]

        def progress(rows: int, total: int) -> None:
            done[0] = rows / total

        given = setup if isinstance(setup, Setup) else Setup()
        with ThreadPoolExecutor(1) as worker:
            # the screen belongs to this thread, the rows are computed in others
            answer = worker.submit(convert, source, target, given, most=MOST_ROWS, progress=progress)
            while not answer.done():
                wait([answer], timeout=0.2)
                bar.progress(min(done[0], 1.0))
        try:
            summary = answer.result()
        except (InputError, NotComputedError) as error:
            status.update(label="Not computed", state="error")
            show.line(str(error).replace(str(source), "the table"), "bad")
            return
        summary.source = summary.written = upload.name
        status.update(label="Computed", state="complete")
        data = target.read_bytes()
    st.download_button("The table with its masses", data, f"masses{suffix}", key="masses", on_click="ignore")
    show.blocks(table_page.document(summary))


def air() -> None:
    """Draw the page of the air."""
    import streamlit as st

    from envcorr.jobs.air import air_density

    st.title("What does the air weigh?")
    left, right = st.columns([2, 3], gap="large")
    setup, error = AIR.read()
    with left:
        AIR.draw(error, setup)
    with right:
        if setup is None:
            return
        try:
            show.blocks(air_page.document(air_density(setup)))
        except (InputError, NotComputedError) as fault:
            show.line(str(fault), "bad")


def level() -> None:
    """Draw the technician's page."""
    import streamlit as st

    from envcorr import units
    from envcorr.intake.level_entry import read_feet, read_sides, read_vial
    from envcorr.jobs.level import Base, Observed, Task, find_level
    from envcorr.numerals import UnitError

    st.title("Is it level enough?")
    left, right = st.columns([2, 3], gap="large")
    with left:
        load = st.text_input("Load on the pan", "200 g", key="level load")
        allowed = st.text_input("Largest error that the tilt may make", "0.05 mg", key="level allowed")
        bubble = st.text_input("Where the bubble stands", "1.2 mm right, 0.4 mm back", key="level bubble")
        vial_text = st.text_input(
            "The vial", "0.3 mm/arcmin", key="level vial", help='Or "radius 1 m", or "10 arcmin per graduation".'
        )
        u_text = st.text_input("Standard uncertainty of the bubble", "0.1 mm", key="level u")
        feet_text = st.text_area(
            "The feet: name = right, back",
            "back left = -80 mm, 60 mm\nback right = 80 mm, 60 mm\nfront = 0 mm, -80 mm",
            key="level feet",
            help="Measured from any common point; three or four lines.",
        )
        pitch_text = st.text_input("Rise of a foot for one turn", "0.8 mm", key="level pitch")
        hand = st.selectbox("Thread", ["right", "left"], key="level hand")

    def size(text: str, kind: str, where: str) -> float:
        try:
            return units.parse(text, kind)
        except UnitError as error:
            raise InputError([Fault(where, error.problem, error.remedy)]) from None

    with right:
        try:
            vial = read_vial(vial_text, "The vial")
            feet, _ = read_feet([one for one in feet_text.splitlines() if one.strip()], [])
            kind = "number" if vial.per_angle is None else "length"
            per = (vial.graduation or 0.0) if vial.per_angle is None else 1 / vial.per_angle
            x, y, known = read_sides(bubble, kind, "Where the bubble stands")
            u = size(u_text, kind, "Uncertainty of the bubble") * per if u_text.strip() else 0.0
            base = None
            if feet:
                names, xs, ys = zip(*((foot.name, foot.x, foot.y) for foot in feet), strict=True)
                pitch = size(pitch_text, "length", "Rise of a foot") if pitch_text.strip() else None
                base = Base(names, xs, ys, pitch, hand == "right")
            result = find_level(
                Task(size(load, "mass", "Load"), size(allowed, "mass", "Largest error")),
                observed=Observed(x * per, y * per, u, known),
                base=base,
            )
        except InputError as error:
            show.refusal(error)
            return
        document = level_page.document(result, vial)
        show.blocks(document)
    with st.bottom:
        verdict = next(block for block in document if isinstance(block, Verdict))
        show.blocks([Verdict(verdict.answer, verdict.tone)])
