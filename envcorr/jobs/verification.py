"""Is an answer that was computed again the one that was recorded?"""

from __future__ import annotations

import json
import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

__all__ = ["CLOSE", "CLOSE_DRAWN", "Verification", "compare"]

CLOSE = 1e-12
"""Relative departure that other machines may show (judgement: a thousand roundings)."""
CLOSE_DRAWN = 1e-9
"""The same of what rests on draws: an end point may fall on the next draw's side of a rounding (judgement)."""
DRAWN = ("by_draws", "as_read", "corrected", "treated", "effects", "quantities", "minimum_weight", "interaction")
"""Parts of an answer that rest on draws."""


@dataclass(frozen=True, slots=True)
class Verification:
    """What became of computing a record's answer again.

    ``departures`` lists what differs, with both values; ``largest`` is the largest relative departure of a number that
    agrees.
    """

    kind: str
    unchanged: bool
    departures: tuple[str, ...]
    largest: float
    made_by: str
    made_on: Mapping[str, str]
    notes: Mapping[str, str]

    @property
    def holds(self) -> bool:
        """Whether the record is as it was written, and its answer is found again."""
        return self.unchanged and not self.departures


def compare(then: Any, now: Any, departures: list[str], where: tuple[str, ...] = ()) -> float:
    """Add what differs between two answers to ``departures``; return the largest relative departure that agrees."""
    if isinstance(then, dict) and isinstance(now, dict):
        pairs = [(key, then.get(key), now.get(key)) for key in dict.fromkeys([*then, *now])]
        return max((compare(one, other, departures, (*where, key)) for key, one, other in pairs), default=0.0)
    if isinstance(then, list) and isinstance(now, list) and len(then) == len(now):
        both = enumerate(zip(then, now, strict=True))
        return max((compare(*pair, departures, (*where, str(i))) for i, pair in both), default=0.0)
    if then == now:
        return 0.0
    if _is_number(then) and _is_number(now):
        close = CLOSE_DRAWN if set(where) & set(DRAWN) else CLOSE
        if math.isclose(then, now, rel_tol=close, abs_tol=0.0):
            return abs(now - then) / max(abs(now), abs(then))
    departures.append(f"{'.'.join(where)}: {_brief(then)} in the record, {_brief(now)} now.")
    return 0.0


def _is_number(thing: Any) -> bool:
    return isinstance(thing, int | float) and not isinstance(thing, bool)


def _brief(thing: Any) -> str:
    text = json.dumps(thing, ensure_ascii=False)
    return text if len(text) <= 60 else f"{text[:57]}..."
