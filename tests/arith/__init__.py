"""Tests of the exact scalar arithmetic and the border classes."""
