"""Tests of the searches: fits, goals, sweeps, overflow in practice."""
