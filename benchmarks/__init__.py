"""Speed as ratios, both sides measured in turn in one run: ``python -m benchmarks``."""
