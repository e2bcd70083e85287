"""Frames with as great an error as can be found, held against the bound."""
