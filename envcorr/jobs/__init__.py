"""The questions that can be asked, one file each; each returns a frozen result."""
