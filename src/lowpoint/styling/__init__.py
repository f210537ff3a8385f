"""What the books written here have in common: their look, their tables, and bytes that are the same on every run."""
