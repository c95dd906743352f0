"""The base of a balance from above: its feet, the higher side, and how each foot is to be turned."""

from __future__ import annotations

import math
from html import escape

from envcorr.document.blocks import Drawing
from envcorr.jobs.level import Base, Observed, Turn

__all__ = ["drawing", "side", "turn_text"]

_SIDES = ("right", "back right", "back", "back left", "left", "front left", "front", "front right")
_WIDTH, _HEIGHT, _MARGIN = 460, 360, 95  # of the picture, in points
_COLUMNS, _ROWS = 58, 13  # of the picture in text
STILL = 0.02
"""Turns that are not worth turning (judgement: seven degrees)."""


def side(x: float, y: float) -> str:
    """Return the side that is higher, in words."""
    if x == 0 and y == 0:
        return "neither side"
    return _SIDES[round(math.atan2(y, x) / (math.pi / 4)) % 8]


def turn_text(turn: Turn) -> str:
    """Return what to do with a foot in a few words."""
    if turn.turns is None:
        if abs(turn.raised) < 5e-6:
            return "leave as it is"
        return f"{'raise' if turn.raised > 0 else 'lower'} by {1e3 * abs(turn.raised):.2f} mm"
    if turn.turns < STILL:
        return "leave as it is"
    return f"{turn.turns:.2f} turn{'s' if turn.turns > 1 else ''} {'clockwise' if turn.clockwise else 'anticlockwise'}"


def drawing(base: Base, observed: Observed, turns: tuple[Turn, ...]) -> Drawing:
    """Return the picture, with words for those who cannot see it."""
    what = "; ".join(f"{turn.name}: {turn_text(turn)}" for turn in turns)
    higher = side(math.tan(observed.x), math.tan(observed.y))
    alt = (
        f"The base seen from above; {higher} is higher. {what}."
        if turns
        else f"The base seen from above; {higher} is higher."
    )
    return Drawing(_svg(base, observed, turns), alt, _lines(base, turns))


def _placed(base: Base, width: float, height: float) -> list[tuple[float, float]]:
    """Return the feet in a field of a width and a height, right to the right and back upwards, in proportion."""
    spans = max(base.x) - min(base.x), max(base.y) - min(base.y)
    scale = min(width / spans[0] if spans[0] else math.inf, height / spans[1] if spans[1] else math.inf)
    middle = (max(base.x) + min(base.x)) / 2, (max(base.y) + min(base.y)) / 2
    return [
        (width / 2 + (x - middle[0]) * scale, height / 2 - (y - middle[1]) * scale)
        for x, y in zip(base.x, base.y, strict=True)
    ]


def _svg(base: Base, observed: Observed, turns: tuple[Turn, ...]) -> str:
    places = [(x + _MARGIN, y + 60) for x, y in _placed(base, _WIDTH - 2 * _MARGIN, _HEIGHT - 130)]
    middle = sum(x for x, _ in places) / len(places), sum(y for _, y in places) / len(places)
    around = sorted(places, key=lambda p: math.atan2(p[1] - middle[1], p[0] - middle[0]))
    outline = " ".join(f"{x:.1f},{y:.1f}" for x, y in around)
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" viewBox="0 0 {_WIDTH} {_HEIGHT}" width="{_WIDTH}" '
        f'height="{_HEIGHT}" font-family="sans-serif" font-size="12" fill="#1d2529">',
        f'<polygon points="{outline}" fill="#f1f3f4" stroke="#56636a" stroke-width="1.5"/>',
        f'<text x="{_WIDTH / 2}" y="16" text-anchor="middle">back</text>',
        f'<text x="{_WIDTH / 2}" y="{_HEIGHT - 6}" text-anchor="middle">front (where you stand)</text>',
    ]
    slope = math.tan(observed.x), math.tan(observed.y)
    size = math.hypot(*slope)
    if size:
        dx, dy = 46 * slope[0] / size, -46 * slope[1] / size
        x, y = middle
        parts += [
            f'<circle cx="{x:.1f}" cy="{y:.1f}" r="52" fill="none" stroke="#56636a" stroke-dasharray="3 3"/>',
            f'<circle cx="{x + dx:.1f}" cy="{y + dy:.1f}" r="11" fill="#fff" stroke="#1d2529" stroke-width="2"/>',
            f'<text x="{x:.1f}" y="{y + 72:.1f}" text-anchor="middle" font-size="11">bubble</text>',
        ]
    todo = {turn.name: turn for turn in turns}
    for name, (x, y) in zip(base.names, places, strict=True):
        turn = todo.get(name)
        parts.append(f'<circle cx="{x:.1f}" cy="{y:.1f}" r="9" fill="#3c5a6b" stroke="#1d2529"/>')
        above = y <= middle[1]
        first = y - 30 if above else y + 24
        parts.append(f'<text x="{x:.1f}" y="{first:.1f}" text-anchor="middle" font-weight="bold">{escape(name)}</text>')
        if turn is not None:
            parts.append(
                f'<text x="{x:.1f}" y="{first + 15:.1f}" text-anchor="middle">{escape(turn_text(turn))}</text>'
            )
    return "".join([*parts, "</svg>"])


def _lines(base: Base, turns: tuple[Turn, ...]) -> tuple[str, ...]:
    """Return the picture in letters: each foot by its number, with what to do below."""
    field = [[" "] * _COLUMNS for _ in range(_ROWS)]
    for number, (x, y) in enumerate(_placed(base, (_COLUMNS - 18) / 2, _ROWS - 3), start=1):
        row, column = round(y) + 1, round(2 * x) + 8  # a letter is about twice as high as wide
        field[row][column : column + 3] = list(f"({number})")
    field[0][_COLUMNS // 2 - 2 : _COLUMNS // 2 + 2] = list("back")
    field[-1][_COLUMNS // 2 - 2 : _COLUMNS // 2 + 3] = list("front")
    told = {turn.name: f": {turn_text(turn)}" for turn in turns}
    names = [f"({i}) {name}{told.get(name, '')}" for i, name in enumerate(base.names, start=1)]
    return (*("".join(row).rstrip() for row in field), *names)
