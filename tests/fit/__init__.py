"""Tests of the fit: integers for ideal taps, and everything "auto" resolved."""
