"""The arithmetic contract in NumPy, stated on its own from the definitions."""
