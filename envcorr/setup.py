"""Setup: everything that was said about one weighing, in SI units, before any model looks at it."""

from __future__ import annotations

import hashlib
import json
from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from typing import Any

from envcorr.estimate import Estimate

__all__ = ["Correlation", "Setup"]


@dataclass(frozen=True, slots=True)
class Correlation:
    """A correlation coefficient between two quantities (a Gaussian copula when drawn)."""

    first: str
    second: str
    coefficient: float


@dataclass(frozen=True, slots=True)
class Setup:
    """What was given: ``estimates`` and ``choices`` by their dotted names, and what goes with them.

    The names are those of the vocabulary, with ``tare.`` or ``adjusted.`` in front for another moment; the error of
    the sensor for ``air.pressure`` is ``sensors.air.pressure``. ``waived`` lists effects that the user takes upon
    themselves, ``improvable`` the quantities that the room can better; ``written`` holds the text that each entry was
    read from, for the echo.
    """

    estimates: Mapping[str, Estimate] = field(default_factory=dict)
    choices: Mapping[str, str] = field(default_factory=dict)
    correlations: tuple[Correlation, ...] = ()
    waived: frozenset[str] = frozenset()
    improvable: tuple[str, ...] = ()
    title: str = ""
    written: Mapping[str, str] = field(default_factory=dict)

    @property
    def digest(self) -> str:
        """The SHA-256 of all that was written, whatever its order."""
        told: list[Any] = [self.title, sorted(self.written.items()), sorted(self.waived), sorted(self.improvable)]
        told += [sorted((c.first, c.second, c.coefficient) for c in self.correlations)]
        return hashlib.sha256(json.dumps(told, separators=(",", ":")).encode()).hexdigest()

    def with_estimates(self, **changes: Estimate) -> Setup:
        """Return the same set-up with some estimates replaced; keys are Python names (``air_temperature``)."""
        from envcorr.catalogue import CATALOGUE

        named = {CATALOGUE.dotted(key): value for key, value in changes.items()}
        return replace(self, estimates={**self.estimates, **named})

    def with_choices(self, **changes: str) -> Setup:
        """Return the same set-up with some choices replaced; keys are Python names (``load_density_kind``)."""
        from envcorr.catalogue import CATALOGUE

        named = {CATALOGUE.dotted_choice(key): value for key, value in changes.items()}
        return replace(self, choices={**self.choices, **named})
