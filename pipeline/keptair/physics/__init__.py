"""Formulas: pure functions of numpy arrays in SI units; no tables, no settings, no files."""
