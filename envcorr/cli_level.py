"""The command of the technician: is it level enough, and which foot do I turn?"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import click

from envcorr.cli_tools import emit_blocks, emit_json, json_option

if TYPE_CHECKING:
    from pathlib import Path

    from envcorr.document.blocks import Block
    from envcorr.intake.level_entry import Foot, Vial
    from envcorr.jobs.level import Observed, Task
    from envcorr.setup import Setup

__all__ = ["level"]


@click.command()
@click.option("--load", "load", metavar="TEXT", help="Net mass on the pan.")
@click.option("--container", metavar="TEXT", help="Mass of the container, where there is one.")
@click.option("--allowed", metavar="TEXT", help="Largest error that the tilt may make.")
@click.option("--resolution", metavar="TEXT", help="Target resolution instead: half of it is allowed.")
@click.option("--setup", metavar="FILE", help="A set-up file that knows load, container, target and tilts.")
@click.option("--tilt", metavar="TEXT", help='How it leans, by the higher side: "2 arcmin right, 1 arcmin back".')
@click.option("--bubble", metavar="TEXT", help='Where the bubble stands: "1.2 mm right, 0.5 mm back"; needs --vial.')
@click.option("--vial", metavar="TEXT", help='"0.3 mm/arcmin", "radius 1 m" or "10 arcmin per graduation".')
@click.option("--height", "heights", multiple=True, metavar="NAME=TEXT", help="How much higher a foot is; repeat.")
@click.option("--u", "uncertainty", metavar="TEXT", help="Standard uncertainty of the tilt, bubble or heights.")
@click.option("--foot", "feet", multiple=True, metavar="NAME=X, Y", help="Where a foot stands, right and back; repeat.")
@click.option("--pitch", metavar="TEXT", help="Rise of a foot for one turn.")
@click.option("--thread", type=click.Choice(["right", "left"]), default="right", show_default=True, help="Its hand.")
@click.option("--keep", metavar="NAME", default="", help="The foot that cannot be turned, or is to stay.")
@click.option("--adjusted-tilt", metavar="TEXT", help="Its tilt when it was adjusted, where that was not level.")
@click.option("--change", metavar="TEXT", help="How much the tilt may change within a weighing (a person steps by).")
@click.option("--diagram", metavar="FILE.svg", help="Draw the base from above with the turns.")
@click.option("--report", "report_file", metavar="FILE", help="Write the page as HTML or PDF, by its ending.")
@click.option("--force", is_flag=True, help="Replace a file where it is already there.")
@click.option("--strict", is_flag=True, help="Exit with 3 unless it is level enough.")
@json_option
@click.pass_context
def level(ctx: click.Context, /, *, strict: bool, as_json: bool, **given: Any) -> None:
    """Is the balance level enough, and which foot do I turn by how much?

    For example: envcorr level --load "200 g" --allowed "0.05 mg" --bubble "1.2 mm right" --vial "0.3 mm/arcmin"
    --foot "left=-80 mm, 60 mm" --foot "right=80 mm, 60 mm" --foot "front=0 mm, -80 mm" --pitch "0.8 mm"
    """
    from pathlib import Path

    from envcorr.document import level as page
    from envcorr.document.blocks import Drawing
    from envcorr.intake.level_entry import read_feet, read_vial
    from envcorr.jobs.level import find_level
    from envcorr.whole_file import check_target, whole_file

    for name, endings in (("diagram", (".svg",)), ("report_file", (".html", ".pdf"))):
        if given[name]:
            check_target(Path(given[name]), endings=endings, force=given["force"])
    setup = _read_setup(given["setup"])
    vial = read_vial(given["vial"]) if given["vial"] else None
    feet, heights = read_feet(given["feet"], given["heights"])
    task = _task(given, setup)
    result = find_level(
        task,
        observed=_observed(given, vial, setup, heights is not None),
        base=_base(given, feet),
        heights=heights,
        u_height=_size(given["uncertainty"], "length", "--u") if heights and given["uncertainty"] else 0.0,
    )
    blocks = page.document(result, vial)
    if given["diagram"]:
        drawing = next((block for block in blocks if isinstance(block, Drawing)), None)
        if drawing is None:
            raise click.UsageError("--diagram needs the feet (--foot) and how it leans, with its sides.")
        with whole_file(Path(given["diagram"])) as part:
            part.write_text(drawing.svg, encoding="utf-8")
    if given["report_file"]:
        _report(Path(given["report_file"]), blocks, given)
    if as_json:
        from envcorr.render import json_level

        emit_json(json_level.level(result))
    else:
        emit_blocks(blocks)
    if strict and result.verdict and result.verdict != "level enough":
        ctx.exit(3)


def _report(path: Path, page: Sequence[Block], given: dict[str, Any]) -> None:
    from envcorr.document.report import short_report
    from envcorr.render import html, pdf
    from envcorr.whole_file import whole_file

    apart = ("diagram", "report_file", "force")
    told = {f"--{name.replace('_', '-')}": value for name, value in given.items() if value and name not in apart}
    inputs = {name: "; ".join(value) if isinstance(value, tuple) else str(value) for name, value in told.items()}
    methods = (
        "The balance feels the cosine of its tilt: cos B/cos A - 1, two axes composed by their tangents (geometry).",
        "Guard band: JCGM 106:2012, 8.3, one-sided, 1.6449 u. Probability: Monte Carlo, JCGM 101:2008.",
    )
    blocks = short_report(page, inputs, methods)
    data = pdf.render(blocks) if path.suffix.lower() == ".pdf" else html.render(blocks).encode()
    with whole_file(path) as part:
        part.write_bytes(data)


def _read_setup(path: str | None) -> Setup:
    from envcorr.intake.setup_file import read_setup
    from envcorr.setup import Setup

    return read_setup(path, require=()) if path else Setup()


def _size(text: str, kind: str, where: str) -> float:
    from envcorr import units
    from envcorr.errors import Fault, InputError
    from envcorr.numerals import UnitError

    try:
        return units.parse(text, kind)
    except UnitError as error:
        raise InputError([Fault(where, error.problem, error.remedy)]) from None


def _task(given: dict[str, Any], setup: Setup) -> Task:
    from envcorr.errors import Fault, InputError
    from envcorr.jobs.level import Task

    known = {name: abs(float(one.centre)) for name, one in setup.estimates.items()}
    spreads = {name: float(one.spread) for name, one in setup.estimates.items()}

    def size(option: str, kind: str, name: str) -> float | None:
        text = given[option]
        return known.get(name) if text is None else _size(text, kind, f"--{option.replace('_', '-')}")

    mass = size("load", "mass", "load.mass")
    allowed = None if given["allowed"] is None else _size(given["allowed"], "mass", "--allowed")
    if allowed is None:
        resolution = size("resolution", "mass", "target.resolution")
        allowed = None if resolution is None else resolution * known.get("target.within", 0.5)
    faults = []
    if mass is None:
        faults.append(Fault("load", "is not given.", 'Write --load "200 g", or --setup FILE.'))
    if allowed is None:
        faults.append(Fault("allowed error", "is not given.", 'Write --allowed "0.05 mg" or --resolution "0.1 mg".'))
    if mass is None or allowed is None:
        raise InputError(faults)
    adjusted = size("adjusted_tilt", "angle", "adjusted.tilt")
    if adjusted is None:
        adjusted = math.hypot(known.get("adjusted.bench.tilt_x", 0.0), known.get("adjusted.bench.tilt_y", 0.0))
    change = None if given["change"] is None else _size(given["change"], "angle", "--change")
    if change is None:
        change = known.get("cycle.tilt_change", 0.0) + spreads.get("cycle.tilt_change", 0.0)
    return Task(mass, allowed, size("container", "mass", "container.mass") or 0.0, adjusted, abs(change))


def _observed(given: dict[str, Any], vial: Vial | None, setup: Setup, by_heights: bool) -> Observed | None:
    from envcorr.intake.level_entry import read_sides
    from envcorr.jobs.level import Observed

    said = [name for name in ("tilt", "bubble") if given[name]] + (["height"] if by_heights else [])
    if len(said) > 1:
        raise click.UsageError(f"--{said[0]} and --{said[1]} both say how it leans: give one.")
    u = given["uncertainty"]
    if given["tilt"]:
        x, y, known = read_sides(given["tilt"], "angle", "--tilt")
        return Observed(x, y, _size(u, "angle", "--u") if u else 0.0, known)
    if given["bubble"]:
        if vial is None:
            raise click.UsageError('--bubble needs --vial, as in --vial "0.3 mm/arcmin".')
        kind = "number" if vial.per_angle is None else "length"
        x, y, known = read_sides(given["bubble"], kind, "--bubble")
        per = vial.graduation if vial.per_angle is None else 1 / vial.per_angle
        assert per is not None
        return Observed(x * per, y * per, _size(u, kind, "--u") * per if u else 0.0, known)
    given_tilts = [setup.estimates.get(f"bench.tilt_{axis}") for axis in "xy"]
    if not by_heights and any(given_tilts):
        x, y = (float(one.centre) if one else 0.0 for one in given_tilts)
        spread = max(float(one.u) if one else 0.0 for one in given_tilts)
        return Observed(x, y, spread)
    return None


def _base(given: dict[str, Any], feet: Sequence[Foot]) -> Any:
    from envcorr.jobs.level import Base

    if not feet:
        for option in ("pitch", "keep", "heights"):
            if given[option]:
                raise click.UsageError(f"--{option.removesuffix('s')} needs the feet: give --foot three or four times.")
        return None
    pitch = None if given["pitch"] is None else _size(given["pitch"], "length", "--pitch")
    names, x, y = zip(*((foot.name, foot.x, foot.y) for foot in feet), strict=True)
    return Base(names, x, y, pitch, given["thread"] == "right", given["keep"])
