"""Readers of what people write: they check words, units and bounds, and leave the physics to the model."""
