"""Tests of the example specs, their data and their committed C."""
