"""Exact range analysis: how wide every register must be, and what error remains."""
