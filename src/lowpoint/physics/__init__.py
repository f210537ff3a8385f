"""Kernels in coherent SI: bare arrays in, an array out, NaN where there is no answer."""
