"""Whether the balance is level enough, and which foot to turn, in words."""

from __future__ import annotations

import math

import envcorr
from envcorr import units
from envcorr.document.blocks import Block, Figure, Figures, Heading, Item, Listing, Text, Tone, Verdict
from envcorr.document.level_drawing import drawing, side, turn_text
from envcorr.document.wording import mass, notices, percent
from envcorr.intake.level_entry import Vial
from envcorr.jobs.level import LevelResult

__all__ = ["angle_text", "document"]

TONES: dict[str, Tone] = {"level enough": "good", "not level enough": "bad", "too near to tell": "open"}


def angle_text(angle: float) -> str:
    """Return an angle in the units that levels and drawings use."""
    arcmin = units.show(angle, "angle", 3, unit="arcmin")
    slope = 1e3 * math.tan(angle)
    return f"{arcmin} ({math.degrees(angle):.3g}°, {1e3 * angle:.3g} mrad, {slope:.3g} mm/m)"


def document(result: LevelResult, vial: Vial | None = None) -> list[Block]:
    """Return the page about a level; ``vial`` tells the tolerance as an offset of its bubble."""
    return [
        Heading("Levelling", level=1),
        Text(_scene(result)),
        *_verdict(result),
        *_turns(result),
        *_tolerance(result, vial),
        *notices(result.notices),
        Text(
            "The balance feels the cosine of its tilt. Turn a foot with the pan empty, let it come to rest, look at "
            f"the level again, and adjust the balance afterwards. envcorr {envcorr.__version__}.",
            quiet=True,
        ),
    ]


def _scene(result: LevelResult) -> str:
    task = result.task
    container = f", container {mass(task.tare)}" if task.tare else ""
    change = (
        f", the tilt changing by up to {units.show(task.change, 'angle', 3)} within a weighing" if task.change else ""
    )
    adjusted = f"adjusted at {units.show(task.adjusted, 'angle', 3)}" if task.adjusted else "adjusted level"
    return f"Load {mass(task.mass)}{container}; allowed are {mass(task.allowed)}; {adjusted}{change}."


def _verdict(result: LevelResult) -> list[Block]:
    if result.tilt is None or result.observed is None or result.error is None:
        return []
    observed = result.observed
    where = (
        f", {side(math.tan(observed.x), math.tan(observed.y))} higher" if observed.sides_known and result.tilt else ""
    )
    sentences = [
        f"It leans by {angle_text(result.tilt)}{where}; that changes a reading of this load by {_signed(result.error)}."
    ]
    if result.task.change:
        sentences.append(f"The change within a weighing adds up to ±{mass(result.error_of_change, 3)}.")
    if result.acceptance is not None and observed.u:
        low, high = result.acceptance
        between = f"between {_arcmin(low)} and {_arcmin(high)}" if low else f"up to {_arcmin(max(high, 0.0))}"
        sentences.append(
            f"With the level read to {_arcmin(observed.u)} (u) the error is within the allowed one with a probability "
            f"of {percent(result.probability or 0.0)}; a reading {between} leaves no doubt (guard band 1.64 u, "
            "JCGM 106)."
        )
    elif result.acceptance is not None:
        sentences.append("The reading of the level was taken as exact: give --u to count its uncertainty.")
    return [Verdict(result.verdict, TONES[result.verdict], tuple(sentences))]


def _arcmin(angle: float) -> str:
    return units.show(angle, "angle", 3, unit="arcmin")


def _signed(error: float) -> str:
    text = mass(error, 3)
    return text if text.startswith("−") or not error else f"+{text}"


def _turns(result: LevelResult) -> list[Block]:
    if result.base is None or result.observed is None:
        return []
    if not result.observed.sides_known:
        return [Text('Which foot to turn cannot be told: say which side is higher, as in "2 arcmin right".')]
    if not result.turns:
        return []
    blocks: list[Block] = [Heading("Which foot to turn")]
    steps = [turn for turn in result.turns if turn_text(turn) != "leave as it is"]
    for turn in sorted(steps, key=lambda turn: -abs(turn.raised)):
        raised = f"{'raises' if turn.raised > 0 else 'lowers'} it by {1e3 * abs(turn.raised):.2f} mm"
        if turn.turns is None:
            blocks.append(Listing((Item(turn.name, f"{turn_text(turn)}."),)))
        else:
            degrees = f", {360 * turn.turns:.0f}°" if turn.turns < 1 else ""
            blocks.append(Listing((Item(turn.name, f"{turn_text(turn)}{degrees}, seen from above; that {raised}."),)))
    if not steps:
        blocks.append(Text("None: it is level to within what a foot can be turned."))
    if result.base.pitch is None:
        blocks.append(Text("With --pitch, the rise of one turn, it is told in turns."))
    else:
        hand = "right" if result.base.right_hand else "left"
        way = "clockwise" if result.base.right_hand else "anticlockwise"
        blocks.append(
            Text(
                f"A foot with a {hand}-hand thread rises when it is turned {way}, seen from above (--thread).",
                quiet=True,
            )
        )
    return [*blocks, drawing(result.base, result.observed, result.turns)]


def _tolerance(result: LevelResult, vial: Vial | None) -> list[Block]:
    figures = [Figure("Largest tilt", angle_text(result.largest_tilt))]
    if result.smallest_tilt:
        figures.append(Figure("Smallest tilt", angle_text(result.smallest_tilt), "it was adjusted out of level"))
    if vial is not None:
        figures.append(Figure("Largest offset of the bubble", _offset(result.largest_tilt, vial)))
    figures += [
        Figure(f"Height of {name}", units.show(height, "length", 3), "to be off at most")
        for name, height in result.heights
    ]
    figures.append(
        Figure("Largest change within a weighing", angle_text(result.largest_change), "it acts on container and load")
    )
    return [Heading("How level it must be"), Figures(tuple(figures))]


def _offset(angle: float, vial: Vial) -> str:
    if vial.per_angle is not None:
        return units.show(angle * vial.per_angle, "length", 3)
    assert vial.graduation is not None
    return f"{angle / vial.graduation:.3g} graduations"
