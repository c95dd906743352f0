"""How the C library hands out memory for arrays."""

from __future__ import annotations

import numpy as np

__all__ = ["keep_freed_memory"]


def keep_freed_memory() -> None:
    """Let the C library keep what is freed, instead of asking the system for it again each time.

    glibc raises its thresholds when one large piece is freed (mallopt(3), M_MMAP_THRESHOLD). The piece is never
    touched, so it costs nothing, and elsewhere nothing comes of it. Without it, page faults take most of the time of
    arithmetic on arrays of some 100 kB.
    """
    np.empty(2**21)
