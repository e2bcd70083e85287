"""Symbolic integers: affine forms over pixels, and functions of one of them."""
