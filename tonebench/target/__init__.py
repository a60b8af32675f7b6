"""Finite arithmetic: formats, rounding, structures and findings."""
