"""Headless workbooks: reading, planning, evaluating, and writing cached values back."""
