"""The laws: pure functions in SI units whose arguments are named as in the textbook; they know no effect."""
