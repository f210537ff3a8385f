"""Many books: which ones, who works on them, what is skipped, and the trail of what was done."""
