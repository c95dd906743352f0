"""From blocks to a face (the terminal), and from a result to JSON."""
