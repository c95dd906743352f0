"""What became of verifying a record, as a plain dictionary for JSON."""

from __future__ import annotations

from typing import Any

from envcorr.jobs.verification import Verification
from envcorr.render.json import envelope

__all__ = ["verification"]


def verification(found: Verification) -> dict[str, Any]:
    """Return the answer of ``envcorr record verify``."""
    result = {
        "kind": found.kind,
        "verified": found.holds,
        "unchanged": found.unchanged,
        "departures": list(found.departures),
        "largest_relative_departure": found.largest,
        "written_by": found.made_by,
        "written_on": dict(found.made_on),
        "notes": dict(found.notes),
    }
    return envelope("record verify", result)
