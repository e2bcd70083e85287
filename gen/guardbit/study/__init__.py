"""Searches over all of the above: goals, fits that are searched, sweeps, overflow in practice."""
