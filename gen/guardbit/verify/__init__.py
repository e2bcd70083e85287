"""The ladder: rungs that compile a routine, call it, and compare what it does to the bit."""
