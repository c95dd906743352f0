"""Invented set-ups and data, shipped so that an installed copy finds them."""
