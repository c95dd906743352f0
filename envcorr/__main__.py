"""``python -m envcorr``: the command line."""

from __future__ import annotations

from envcorr.cli import main

if __name__ == "__main__":
    main()
