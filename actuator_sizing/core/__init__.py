"""Equations only: SI floats and arrays in, the same out; no input or output, no tables, no units."""
