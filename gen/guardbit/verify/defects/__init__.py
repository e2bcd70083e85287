"""Seeded defects: mutants of C sources, and which rungs of the ladder notice them."""
