"""guardbit: two-dimensional fixed-point filters, exact to the last bit."""

__version__ = "0.1.0"
