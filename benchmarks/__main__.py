"""Run all benchmarks, or those named: ``python -m benchmarks [air] [room] [startup]``."""

from __future__ import annotations

import importlib
import sys

NAMES = ("startup", "air", "room", "limits", "mass", "page")


def main(names: list[str]) -> int:
    """Print each ratio beside its bound; return 1 where one is not held."""
    failed = 0
    for name in names or NAMES:
        if name not in NAMES:
            print(f"no benchmark {name}; known are {', '.join(NAMES)}", file=sys.stderr)
            return 2
        for outcome in importlib.import_module(f"benchmarks.{name}").outcomes():
            mark = "held" if outcome.held else "NOT HELD"
            print(
                f"{outcome.what}: {outcome.ratio:.3g} (at most {outcome.bound:g}: {mark}; {outcome.detail})", flush=True
            )
            failed += not outcome.held
    return int(failed > 0)


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
