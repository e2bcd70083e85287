"""Tests of the ladder."""
