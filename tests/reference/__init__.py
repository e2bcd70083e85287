"""Tests of the NumPy reference."""
