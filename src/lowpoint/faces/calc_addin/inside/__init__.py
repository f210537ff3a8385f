"""What runs in the office's own Python: standard library only, and no name that another program could have."""
