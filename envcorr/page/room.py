"""The planner's page: can this room reach the target, and what spoils it?"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import TYPE_CHECKING

from envcorr import units
from envcorr.document import room as page
from envcorr.document.blocks import Block, Column, Group, Heading, Table, Verdict
from envcorr.document.wording import MassScale, capital
from envcorr.errors import InputError, NotComputedError
from envcorr.intake.setup_file import REQUIRED
from envcorr.jobs.map import Axis, AxisRequest, axis_of
from envcorr.jobs.room import RoomResult, check_room
from envcorr.jobs.scan import Scan
from envcorr.page import show
from envcorr.page.form import Form, titled
from envcorr.page.start import begin, hand_out, reports
from envcorr.setup import Setup

if TYPE_CHECKING:
    from envcorr.estimate import Estimate

__all__ = ["draw", "sizes"]

FORM = Form(
    "room",
    (
        "target.resolution",
        "load.mass",
        "load.density",
        "load.density_kind",
        "load.insulating",
        "air.temperature",
        "air.pressure",
        "air.humidity",
        "balance.repeatability",
        "balance.scale_interval",
        "balance.sensitivity_temperature_coefficient",
        "adjusted.when",
    ),
    tuple(REQUIRED),
)
DRAWS = (2**14, 2**17, 2**20)
"""Numbers of draws to choose from; the first is quick enough for the sliders."""
SLIDERS = ("first", "second")


def draw() -> None:
    """Draw the page."""
    import streamlit as st

    st.title("Can this room do it?")
    begin(FORM)
    left, right = st.columns([2, 3], gap="large")
    setup, error = FORM.read()
    with left:
        FORM.draw(error, setup)
        hand_out(FORM)
    with right:
        if setup is None:
            show.blocks([Verdict("not computed yet", "open", ("Fill in what is marked beside the fields.",))])
            _verdict_below(Verdict("not computed yet", "open"))
            return
        answer = st.container()  # the answer first, the sliders right below it
        try:
            changed = _what_if(setup)
            count = st.selectbox(
                "Draws of the Monte Carlo", DRAWS, key="draws", format_func=lambda n: f"{n:,}".replace(",", " ")
            )
            with st.spinner(f"{count} draws", show_time=count > DRAWS[0]):
                result = check_room(changed, draws=count)
        except (InputError, NotComputedError) as fault:
            show.line(str(fault), "bad")
            return
        document = page.document(result)
        verdict = next(block for block in document if isinstance(block, Verdict))
        with answer:
            show.blocks([verdict, *sizes(result)])
        _pictures(changed)
        show.blocks([block for block in document if block is not verdict])
        reports("room", document, result.plan)
    _verdict_below(verdict)


def _verdict_below(verdict: Verdict) -> None:
    """Keep the answer in view, wherever the page is scrolled to."""
    import streamlit as st

    with st.bottom:
        show.blocks([Verdict(verdict.answer, verdict.tone)])


def sizes(result: RoomResult) -> list[Block]:
    """Return the contributions of one weighing, the largest first, as bars."""
    rows = [(capital(row.title), math.hypot(row.mean_error, row.u), row.own) for row in result.effects]
    rows = sorted((row for row in rows if row[1] > 0), key=lambda row: -row[1])
    if not rows:
        return []
    scale = MassScale.fitting(result.resolution, [rows[0][1]])
    most = rows[0][1]
    cells = tuple((title, scale.text(size), size / most, "balance" if own else "room") for title, size, own in rows)
    columns = (Column("Effect"), Column(f"rms [{scale.unit}]", "right"), Column("", "bar"), Column("of the"))
    caption = "Root mean square of the error of one weighing as it is read: mean and scatter together."
    return [Heading("What spoils it"), Table(columns, (Group(cells),), caption)]


def _what_if(setup: Setup) -> Setup:
    """Draw the sliders; return the set-up with what they say."""
    import streamlit as st

    scan = Scan(setup)
    names = [
        leaf.name
        for row, leaf in enumerate(scan.plan.leaves)
        if leaf.name in setup.estimates and any(scan.plan.reaches(row, effect) for effect in scan.plan.effects)
    ]

    def reset() -> None:
        for which in SLIDERS:
            st.session_state[f"what if {which}"] = None

    changes: dict[str, Estimate] = {}
    with st.container(border=True):
        st.markdown("**What if …**")
        for which in SLIDERS:
            chosen = st.selectbox(
                f"The {which} quantity to move",
                names,
                index=None,
                key=f"what if {which}",
                format_func=titled,
                placeholder="none",
            )
            if chosen is None:
                continue
            axis = axis_of(scan, AxisRequest(chosen), 2)
            changes[chosen] = _slider(axis, which, setup.estimates[chosen])
        if changes:
            st.button("Back to the set-up", on_click=reset, key="reset")
    return replace(setup, estimates={**setup.estimates, **changes})


def _slider(axis: Axis, which: str, estimate: Estimate) -> Estimate:
    import streamlit as st

    unit = units.fitting_unit(float(axis.values[-1]), axis.kind)
    low, high, now = (
        float(units.to_unit(float(v), axis.kind, unit)) for v in (axis.values[0], axis.values[-1], axis.now)
    )
    size = st.slider(
        f"{capital(axis.caption)} [{unit}]" if unit else capital(axis.caption),
        min(low, now),
        max(high, now),
        now,
        (max(high, now) - min(low, now)) / 200,
        key=f"slide {which} {axis.name}",
    )
    value = float(units.from_unit(size, axis.kind, unit))
    if axis.varied == "value":
        return estimate.about(value)
    return replace(estimate, spread=value)


def _pictures(setup: Setup) -> None:
    """Offer a map of two quantities, and a curve against one, drawn when asked for."""
    import streamlit as st

    from envcorr.document import map as chart
    from envcorr.jobs.map import make_curve, make_grid

    scan = Scan(setup)
    names = [leaf.name for leaf in scan.plan.leaves if leaf.name in setup.estimates]

    @st.fragment
    def field() -> None:
        x = st.selectbox("Across", names, index=None, key="map x")
        y = st.selectbox("Upwards (none: a curve of the error)", names, index=None, key="map y")
        if not x or not st.button("Draw it", key="map draw"):
            return
        bar = st.progress(0.0, "room checks")

        def told(done: int, total: int) -> None:
            bar.progress(done / total)

        try:
            if y:
                blocks = chart.grid(make_grid(setup, AxisRequest(x), AxisRequest(y), steps=30, progress=told))
            else:
                blocks = chart.curve(make_curve(setup, AxisRequest(x), progress=told))
        except InputError as error:
            show.refusal(error)
        else:
            show.blocks(blocks[2:])
        bar.empty()

    with st.expander("Where is it reached? A map or a curve"):
        field()
