"""The fit for the least deviation of the frequency response."""
