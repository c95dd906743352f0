"""The page in the browser: the same jobs, shown as the same blocks."""
