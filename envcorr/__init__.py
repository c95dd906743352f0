"""envcorr: what the surroundings do to a high-resolution weighing."""

from __future__ import annotations

__version__ = "0.1.0"
