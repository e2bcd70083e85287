"""Exact scalar arithmetic of the contract: rounding, overflow, intervals, borders."""
